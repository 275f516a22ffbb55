/** A proof run of the demo: written devices read again, with the output that their firmware computes. */
import { decodeImage } from "@/builders/codec/image";
import { twinOf, twinOutput } from "@/builders/codec/twin/twin";
import { eachImages, type ImageRow } from "@/db/queries/images";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { signalMvV, thermometerCounts } from "./device-model";
import { EQUIPMENT_OF } from "./ground";
import type { DemoLot } from "./lot";
import type { Story } from "./story";

export interface ProofStep {
  package: string;
  /** Range of the package's serials, as `slice` takes it. */
  devices: [from: number, to?: number];
  temperaturesC: readonly number[];
}

const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at,output_mv_v";
const MINUTES_BETWEEN_POINTS = 190;
/** The output is sent with seven decimals and without noise of its own: it is computed from the signal. */
const OUTPUT_DECIMALS = 7;

/** Reads written devices on the clock's day, loaded and unloaded, and uploads the run in the evening. @returns the run's id */
export async function proveDevices(story: Story, lot: DemoLot, step: ProofStep): Promise<string> {
  const images: ImageRow[] = [];
  for await (const part of eachImages(story.db, step.package)) images.push(...part);
  const layout = (await layoutsOfPackages(story.db, [step.package])).get(step.package);
  if (layout === undefined) throw new Error(`no layout of ${step.package}`);
  const { document } = lot.family;
  const startedAt = new Date(story.clock.now().getTime() - 12 * 3_600_000);
  const lines = images.slice(...step.devices).flatMap((image) => {
    const twin = twinOf(layout, decodeImage(layout, image.bytes), { referenceTemperature: document.referenceC });
    return linesOf(lot, step, startedAt, image.serial, (signal, counts) => twinOutput(twin, signal, counts));
  });
  const run = await uploadRun(story.as("engineer"), {
    lot: lot.code,
    purpose: "proof",
    equipment: EQUIPMENT_OF[document.code] ?? [],
    addDevices: false,
    fileName: `${lot.code}-proof.csv`,
    bytes: Buffer.from(`${[HEADER, ...lines].join("\n")}\n`),
  });
  return run.id;
}

function linesOf(
  lot: DemoLot,
  { temperaturesC }: ProofStep,
  startedAt: Date,
  serial: string,
  outputOf: (signal: number, counts: number) => number,
): string[] {
  const { family, random } = lot;
  const { document, parameters } = family;
  const device = lot.devices.find((one) => one.serial === serial);
  if (device === undefined) throw new Error(`${serial} is no device of ${lot.code}`);
  return temperaturesC.flatMap((target, index) =>
    [0, 0.6 * document.capacityKg].map((loadKg, row) => {
      const chamberC = random.normal(target, 0.06);
      const soak = document.minSoakMinutes + 6 + 6 * row;
      const counts = Number(random.normal(thermometerCounts(device, chamberC), parameters.noiseCounts).toFixed(2));
      const signal = Number(
        random.normal(signalMvV(device, document, chamberC, loadKg), parameters.noiseMvV).toFixed(7),
      );
      const at = new Date(startedAt.getTime() + (index * MINUTES_BETWEEN_POINTS + soak) * 60_000);
      const output = outputOf(signal, counts).toFixed(OUTPUT_DECIMALS);
      return [serial, index + 1, chamberC.toFixed(3), soak, counts, loadKg, signal, at.toISOString(), output].join(",");
    }),
  );
}
