import type { ComparableResult } from "@/lib/domain/compensation/derivation-effect";
import type { DerivationView } from "@/schemas/api/derivations";

export interface OfferedRun {
  id: string;
  purpose: string;
  createdAt: string;
  devices: number;
  temperatureLowC: number | null;
  temperatureHighC: number | null;
}

export interface Exclusion {
  key: number;
  serial: string;
  reason: string;
}

export interface DeriveOptions {
  method: string;
  order: string;
  runs: ReadonlySet<string>;
  exclusions: readonly Exclusion[];
}

/** A derivation whose options are the starting point, and whose result is what a preview is held against. */
export interface LikeDerivation {
  id: string;
  title: string;
  method: string;
  order: number;
  runs: readonly string[];
  exclude: readonly { serial: string; reason: string }[];
  result: ComparableResult;
}

/** What the form needs of a derivation; an import has no options to begin with. */
export function likeOf(view: DerivationView, title: string): LikeDerivation | undefined {
  if (view.method === "import") return undefined;
  const { id, method, order, pooled, counts, findings, verification } = view;
  return {
    id,
    title,
    method,
    order,
    runs: view.runs.map((run) => run.id),
    exclude: view.exclude.map(({ serial, reason }) => ({ serial, reason })),
    result: { pooled: pooled ?? null, counts, findings, verification },
  };
}

/** The options a form starts with: those of another derivation, else the newest run of each purpose, pooled, order 1. */
export function startingOptions(
  runs: readonly OfferedRun[],
  like: LikeDerivation | undefined,
  exclude: readonly string[],
): DeriveOptions {
  const listed = like?.exclude ?? [];
  const added = exclude.filter((serial) => !listed.some((one) => one.serial === serial));
  const exclusions = [...listed, ...added.map((serial) => ({ serial, reason: "" }))];
  const offered = new Set(runs.map((run) => run.id));
  return {
    method: like?.method ?? "pooled-gain",
    order: String(like?.order ?? 1),
    runs: like ? new Set(like.runs.filter((id) => offered.has(id))) : newestOfEachPurpose(runs),
    exclusions: exclusions.map((one, key) => ({ key, ...one })),
  };
}

/** The newest run of each purpose: what is most often derived from. */
function newestOfEachPurpose(runs: readonly OfferedRun[]): Set<string> {
  const ids = new Map<string, string>();
  for (const { id, purpose } of runs) if (!ids.has(purpose)) ids.set(purpose, id);
  return new Set(ids.values());
}

/** What is sent to derive or to preview. */
export function bodyOf({ method, order, runs, exclusions }: DeriveOptions) {
  const exclude = exclusions.map(({ serial, reason }) => ({ serial, reason }));
  return { method, order: Number(order), runs: [...runs], exclude };
}
