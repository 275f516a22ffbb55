import type { Db } from "@/db/executor";
import type { Purpose } from "@/lib/domain/compensation/types";
import { decideDerivation } from "@/lib/services/derivations/decide-derivation";
import { getDerivationView } from "@/lib/services/derivations/get-derivation";
import { runDerivation } from "@/lib/services/derivations/run-derivation";
import { startDerivation } from "@/lib/services/derivations/start-derivation";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { systemContext } from "../jobs";
import { arrangeFamilyLot, arrangeSecondFamilyLot, type ScenarioPeople } from "./family-lot";
import type { GoldenLot } from "./golden";

export interface ReadLot extends GoldenLot {
  /** Run id by purpose. */
  runs: Record<"sample" | "zero" | "span" | "verification", string>;
}

export interface DerivedLot extends ReadLot {
  /** Id of the pooled-gain derivation of all four runs. */
  derivation: string;
}

const PURPOSES = ["sample", "zero", "span", "verification"] as const satisfies Purpose[];

/** Uploads the four runs of a golden lot as the engineer. */
export async function uploadGoldenRuns(people: ScenarioPeople, golden: GoldenLot): Promise<ReadLot> {
  const runs = {} as ReadLot["runs"];
  for (const purpose of PURPOSES) {
    const bytes = golden.read(`readings-${purpose}.csv`);
    const run = await uploadRun(people.engineer, { lot: golden.lot, purpose, equipment: [], addDevices: false, bytes });
    runs[purpose] = run.id;
  }
  return { ...golden, runs };
}

/** A finished pooled-gain derivation of order 1 from all four runs, still to be decided. */
export async function deriveGolden(
  people: ScenarioPeople,
  read: ReadLot,
  exclude: { serial: string; reason: string }[] = [],
): Promise<DerivedLot> {
  const runs = Object.values(read.runs);
  const { id } = await startDerivation(people.engineer, {
    lot: read.lot,
    method: "pooled-gain",
    order: 1,
    runs,
    exclude,
  });
  await runDerivation(systemContext(people.engineer.db as Db), { derivationId: id });
  return { ...read, derivation: id };
}

/** Approves every set of a derivation as the reviewer, accepting its soft findings. */
export async function approveDerivation({ reviewer, password }: ScenarioPeople, id: string): Promise<void> {
  const { findings } = await getDerivationView(reviewer, id);
  const soft = [...new Set(findings.filter((one) => one.severity === "soft").map((one) => one.code))];
  const acknowledge = soft.map((finding) => ({ finding, reason: "Looked at, of no weight here" }));
  await decideDerivation(reviewer, { id, decision: "approve", acknowledge, password });
}

/** Lot MW20-2609 with its four runs, derived by the engineer and approved by the reviewer. */
export async function arrangeDerived(people: ScenarioPeople): Promise<DerivedLot> {
  const read = await uploadGoldenRuns(people, await arrangeFamilyLot(people));
  const derived = await deriveGolden(people, read);
  await approveDerivation(people, derived.derivation);
  return derived;
}

/** Lot MW300-2610 with its four runs, one sample device excluded, derived and approved. */
export async function arrangeSecondDerived(people: ScenarioPeople): Promise<DerivedLot> {
  const read = await uploadGoldenRuns(people, await arrangeSecondFamilyLot(people));
  const expected = JSON.parse(read.read("expected-coefficients.json").toString("utf8")) as { exclude: string[] };
  const exclude = expected.exclude.map((serial) => ({ serial, reason: "Connector was loose during the run" }));
  const derived = await deriveGolden(people, read, exclude);
  await approveDerivation(people, derived.derivation);
  return derived;
}
