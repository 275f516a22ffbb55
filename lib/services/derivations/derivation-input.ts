import { derivationDigest } from "@/builders/bundle/manifest";
import type { Db } from "@/db/executor";
import type { FamilyRevisionRow } from "@/db/queries/families";
import type { LotRow } from "@/db/queries/lots";
import { listReadings, listRepeatedSerials } from "@/db/queries/readings";
import { listRunsById, type RunRow } from "@/db/queries/runs";
import type { DerivationInput, FamilyRules, Reading, RunReadings } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";
import type { NewDerivationBody } from "@/schemas/api/derivations";

/**
 * The runs named for a derivation, checked as far as that goes without computing.
 * @throws AppError `run.not_found`, `derivation.run_of_other_lot`, `derivation.run_superseded` {run, by},
 * `derivation.no_readings`, `run.serial_repeated` {serial, purpose, runs}
 */
export async function getUsableRuns(db: Db, lot: LotRow, ids: readonly string[]): Promise<RunRow[]> {
  const wanted = [...new Set(ids)];
  const runs = await listRunsById(db, wanted);
  for (const id of wanted) {
    const run = runs.find((one) => one.id === id);
    if (!run) throw new AppError("run.not_found", { run: id, message: `There is no run ${id}.` });
    if (run.lotId !== lot.id) {
      throw new AppError("derivation.run_of_other_lot", {
        run: id,
        message: `That run belongs to lot ${run.lotCode}.`,
      });
    }
    const by = run.supersededById;
    if (by !== null && !wanted.includes(by)) {
      const message = `The ${run.purpose} run of ${run.createdAt.toISOString().slice(0, 10)} was superseded; use the run that replaces it.`;
      throw new AppError("derivation.run_superseded", { run: id, by, message });
    }
  }
  const counted = runs.filter((run) => run.purpose !== "proof" && run.supersededById === null);
  if (counted.length === 0) {
    throw new AppError("derivation.no_readings", { message: "None of these runs says anything on coefficients." });
  }
  const [repeated] = await listRepeatedSerials(
    db,
    counted.map((run) => run.id),
    1,
  );
  if (repeated) {
    const { serial, purpose } = repeated;
    const message = `${serial} is in two ${purpose} runs, and neither supersedes the other: leave one out.`;
    throw new AppError("run.serial_repeated", { ...repeated, message });
  }
  return runs;
}

/** The runs with their readings, as the arithmetic takes them. */
export async function readRuns(db: Db, runs: readonly RunRow[]): Promise<RunReadings[]> {
  const byRun = new Map<string, Reading[]>(runs.map((run) => [run.id, []]));
  for (const { runId, ...reading } of await listReadings(db, [...byRun.keys()])) byRun.get(runId)?.push(reading);
  return runs.map(({ id, purpose, supersedesId }) => ({
    id,
    purpose,
    supersedes: supersedesId,
    readings: byRun.get(id) ?? [],
  }));
}

export interface DerivationPlan {
  lot: LotRow;
  revision: FamilyRevisionRow;
  rules: FamilyRules;
  runs: readonly RunRow[];
  options: Pick<NewDerivationBody, "method" | "order" | "exclude">;
}

/** What {@link derive} takes, with the readings of the runs. */
export async function readInput(db: Db, { rules, runs, options }: DerivationPlan): Promise<DerivationInput> {
  const { method, order, exclude } = options;
  return { family: rules, method, order, exclude, runs: await readRuns(db, runs) };
}

/** SHA-256 of the inputs, lower-case hex (contract, section 5). */
export function digestOf({ lot, revision, runs, options }: DerivationPlan, engine: string): string {
  return derivationDigest({
    method: options.method,
    order: options.order,
    family: { code: lot.familyCode, revision: revision.number, sha256: revision.sha256.toString("hex") },
    runs: runs.map((run) => ({ purpose: run.purpose, sha256: run.sha256.toString("hex") })),
    exclude: options.exclude,
    engine,
  });
}
