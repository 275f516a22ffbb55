import { sha256Hex } from "@/builders/bundle/sha256";
import type { Db } from "@/db/executor";
import { listSets } from "@/db/queries/coefficients";
import { type DerivationRow, getDerivation, listDerivationRunIds, listExclusions } from "@/db/queries/derivations";
import { getFamilyRevision } from "@/db/queries/families";
import { listPackageDerivationIds } from "@/db/queries/package-inputs";
import { getRunFile, listRunsById } from "@/db/queries/runs";
import { COMPENSATION_ENGINE, derive } from "@/lib/domain/compensation/derive";
import type { Coefficients, Method, RunReadings } from "@/lib/domain/compensation/types";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";

/** Serials named at most where values differ. */
const NAMED = 20;
/** Sets read at a time. */
const PAGE_SETS = 2_000;

/** What became of deriving coefficients again from the readings as they were uploaded. */
export interface RepeatedDerivation {
  id: string;
  /** False where it was not derived again; `reason` says why. */
  done: boolean;
  reason?: string;
  /** Sets compared, and how many of them came out otherwise. */
  devices: number;
  differing: number;
  serials: string[];
}

/**
 * Derives the coefficients of a package's derivations again from the bytes of their runs, and compares every value with the
 * stored one. Imported values have no readings, and what other arithmetic computed can't be repeated by this one.
 */
export async function repeatDerivations(db: Db, packageId: string): Promise<RepeatedDerivation[]> {
  const repeated: RepeatedDerivation[] = [];
  for (const id of await listPackageDerivationIds(db, packageId)) {
    repeated.push(await repeatOne(db, await getDerivation(db, id)));
  }
  return repeated;
}

async function repeatOne(db: Db, derivation: DerivationRow): Promise<RepeatedDerivation> {
  const { id, engine, method } = derivation;
  const left = (reason: string) => ({ id, done: false, reason, devices: 0, differing: 0, serials: [] });
  if (method === "import") return left("imported values: there are no readings to derive them from");
  if (engine !== COMPENSATION_ENGINE)
    return left(`derived by arithmetic ${engine}; this version has ${COMPENSATION_ENGINE}`);
  const runs = await readRunFiles(db, id);
  if (typeof runs === "string") return left(runs);
  const exclude = (await listExclusions(db, id)).map(({ serial, reason }) => ({ serial, reason }));
  const family = (await getFamilyRevision(db, derivation.familyRevisionId)).document;
  const result = derive({ family, method: method as Method, order: derivation.order, exclude, runs });
  const again = new Map(result.devices.map(({ serial, coefficients }) => [serial, coefficients]));
  return { id, done: true, ...(await compareSets(db, id, again)) };
}

/** The runs with their readings, read from the bytes as uploaded; or why they can't be. */
async function readRunFiles(db: Db, derivationId: string): Promise<RunReadings[] | string> {
  const read: RunReadings[] = [];
  for (const run of await listRunsById(db, await listDerivationRunIds(db, derivationId))) {
    const bytes = await getRunFile(db, run.id);
    if (sha256Hex(bytes) !== run.sha256.toString("hex")) return `the file of run ${run.id} is not the one uploaded`;
    const { readings } = await parseReadingsCsv(bytes);
    read.push({ id: run.id, purpose: run.purpose, supersedes: run.supersedesId, readings });
  }
  return read;
}

async function compareSets(db: Db, derivationId: string, again: ReadonlyMap<string, Coefficients | null>) {
  const found = { devices: 0, differing: 0, serials: [] as string[] };
  for (let after = "", more = true; more; ) {
    const sets = await listSets(db, derivationId, { after, limit: PAGE_SETS });
    for (const { serial, coefficients } of sets) {
      found.devices++;
      if (areSame(coefficients, again.get(serial) ?? null)) continue;
      if (found.differing++ < NAMED) found.serials.push(serial);
    }
    after = sets.at(-1)?.serial ?? after;
    more = sets.length === PAGE_SETS;
  }
  return found;
}

/** Equal to the last bit: the same readings and arithmetic leave no room for less. */
function areSame(a: Coefficients | null, b: Coefficients | null): boolean {
  if (a === null || b === null) return a === b;
  const names = Object.keys({ ...a, ...b }) as (keyof Coefficients)[];
  return names.every((name) => (a[name] ?? null) === (b[name] ?? null));
}
