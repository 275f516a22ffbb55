/** A planned run of the demo: batches told, a sample drawn over them, and the sheet ready for the chamber. */
import { addDevices } from "@/lib/services/lots/add-devices";
import { planRun } from "@/lib/services/run-plans/plan-run";
import { drawSample } from "@/lib/services/samples/draw-sample";
import { EQUIPMENT_OF } from "./ground";
import type { DemoLot } from "./lot";
import type { Story } from "./story";

const SAMPLE = 10;
const SEED = "5eed0000000000000000000000002606";
/** Devices made from one batch of gauges, and from one bar of material. */
const GAUGE_BATCH = 50;
const MATERIAL_BATCH = 80;

/** Tells what the devices are made of, draws a sample over it and plans its run. */
export async function planSampleRun(story: Story, lot: DemoLot): Promise<void> {
  const engineer = story.as("engineer");
  const devices = lot.devices.map(({ serial }, index) => ({
    serial,
    gaugeBatch: `G-26${41 + Math.floor(index / GAUGE_BATCH)}`,
    materialBatch: `AL-${108 + Math.floor(index / MATERIAL_BATCH)}`,
  }));
  await addDevices(engineer, { lot: lot.code, devices });
  const { id, serials } = await drawSample(engineer, { lot: lot.code, count: SAMPLE, seed: SEED });
  const {
    temperatureMinC: low,
    temperatureMaxC: high,
    referenceC,
    capacityKg,
    minSoakMinutes,
    code,
  } = lot.family.document;
  // Up, down and back to the first temperature, which tells a lasting shift from drift.
  const points = [referenceC, high, low, referenceC].map((setC, index) => ({
    point: index + 1,
    setC,
    soakMin: minSoakMinutes,
    loadsKg: [0.6 * capacityKg],
    repeats: 2,
    dwellS: 30,
  }));
  await planRun(engineer, {
    lot: lot.code,
    name: "Sample in CH-2",
    purpose: "sample",
    devices: serials.map((serial, index) => ({ serial, position: `P${String(index + 1).padStart(2, "0")}` })),
    points,
    equipment: [...(EQUIPMENT_OF[code] ?? [])],
    sampleDraw: id,
  });
}
