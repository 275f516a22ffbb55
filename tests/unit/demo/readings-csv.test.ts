import { describe, expect, it } from "vitest";
import { drawDevice, signalMvV } from "@/lib/demo/device-model";
import { benchFamily, DEMO_SEED } from "@/lib/demo/families";
import { seededRandom } from "@/lib/demo/random";
import { writeRunCsv } from "@/lib/demo/readings-csv";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";

const { document: family, parameters } = benchFamily;

function sampleRun(seed: number): Buffer {
  const random = seededRandom(seed);
  const devices = ["A-1", "A-2"].map((serial) => drawDevice(random, parameters, serial));
  const startedAt = new Date("2026-09-14T06:00:00Z");
  const plan = { purpose: "sample" as const, devices, temperaturesC: [10, 21.5, 40], startedAt };
  return writeRunCsv(plan, { family, parameters, random });
}

describe("the demo's readings", () => {
  it("are the same at every run from the stated seed, and others from another", () => {
    expect(sampleRun(DEMO_SEED).equals(sampleRun(DEMO_SEED))).toBe(true);
    expect(sampleRun(DEMO_SEED).equals(sampleRun(DEMO_SEED + 1))).toBe(false);
  });

  it("are a file that the importer takes, loaded and unloaded at each temperature", async () => {
    const { readings, errors } = await parseReadingsCsv(sampleRun(DEMO_SEED));
    expect(errors).toEqual([]);
    expect(readings).toHaveLength(2 * 3 * 4);
    expect(new Set(readings.map((reading) => reading.loadKg))).toEqual(new Set([0, 12]));
  });

  it("drift by the parameters of the device", () => {
    const device = drawDevice(seededRandom(1), parameters, "A-1");
    const spanAt = (temperatureC: number) =>
      signalMvV(device, family, temperatureC, 20) - signalMvV(device, family, temperatureC, 0);
    const perK = (spanAt(30) / spanAt(20) - 1) / 10;
    expect(perK).toBeCloseTo(device.sensitivity[1] + 10 * device.sensitivity[2], 12);
  });
});

describe("the seeded generator", () => {
  it("is uniform over [0, 1) and normal with the asked mean and deviation", () => {
    const random = seededRandom(7);
    const uniform = Array.from({ length: 20_000 }, () => random.uniform());
    expect(Math.min(...uniform)).toBeGreaterThanOrEqual(0);
    expect(Math.max(...uniform)).toBeLessThan(1);
    expect(uniform.reduce((sum, value) => sum + value, 0) / uniform.length).toBeCloseTo(0.5, 2);
    const normal = Array.from({ length: 20_000 }, () => random.normal(3, 2));
    const mean = normal.reduce((sum, value) => sum + value, 0) / normal.length;
    const deviation = Math.sqrt(normal.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (normal.length - 1));
    expect(Math.abs(mean - 3)).toBeLessThan(0.06);
    expect(Math.abs(deviation - 2)).toBeLessThan(0.05);
  });
});
