import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type DrawCandidate, drawSample } from "@/lib/domain/compensation/draw-sample";
import { randomSource } from "@/lib/domain/compensation/random-source";

const SEED = "0f1e2d3c4b5a69788796a5b4c3d2e1f0";

function lot(sizes: Record<string, number>): DrawCandidate[] {
  return Object.entries(sizes).flatMap(([batch, size]) =>
    Array.from({ length: size }, (_, i) => ({
      serial: `${batch}-${String(i).padStart(4, "0")}`,
      gaugeBatch: batch,
      materialBatch: null,
    })),
  );
}

const drawnBy = (devices: DrawCandidate[], count: number, seed = SEED) =>
  Object.fromEntries(drawSample({ devices, count, seed }).strata.map((s) => [s.gaugeBatch, s.drawn]));

describe("random source", () => {
  /** Source: outputs of the authors' reference program xoshiro128starstar.c, version 1.1, from the state {1, 2, 3, 4}. */
  it("is xoshiro128**", () => {
    const random = randomSource("00000001000000020000000300000004");
    expect(Array.from({ length: 10 }, () => random.nextWord())).toEqual([
      11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849, 3729100597, 4258142804,
    ]);
  });

  it("stays below its bound, up to all of 2³²", () => {
    const random = randomSource(SEED);
    for (const bound of [1, 2, 3, 1000, 2 ** 31 + 1, 2 ** 32])
      for (let i = 0; i < 50; i++) {
        const value = random.nextBelow(bound);
        expect(Number.isInteger(value) && value >= 0 && value < bound).toBe(true);
      }
    expect(random.nextBelow(1)).toBe(0);
  });

  it.each(["", "1234", "g".repeat(32), "0".repeat(32), `${SEED}0`])("refuses the seed %j", (seed) => {
    expect(() => randomSource(seed)).toThrow(expect.objectContaining({ code: "draw.seed_invalid" }));
  });
});

describe("drawing a sample", () => {
  const devices = lot({ G1: 600, G2: 300, G3: 100 });

  it("gives the batches their proportional shares", () => {
    expect(drawnBy(devices, 10)).toEqual({ G1: 6, G2: 3, G3: 1 });
    expect(drawnBy(devices, 1000)).toEqual({ G1: 600, G2: 300, G3: 100 });
  });

  it("draws from a small batch too, where the count reaches for all", () => {
    expect(drawnBy(lot({ G1: 990, G2: 8, G3: 2 }), 5)).toEqual({ G1: 3, G2: 1, G3: 1 });
    expect(drawnBy(lot({ G1: 990, G2: 8, G3: 2 }), 2)).toEqual({ G1: 2, G2: 0, G3: 0 });
  });

  it("counts a pair of gauge and material batch as one stratum, unknown ones last", () => {
    const mixed = ["A", "B", null].flatMap((gaugeBatch) =>
      ["X", null].flatMap((materialBatch) =>
        [1, 2].map((i) => ({ serial: `${gaugeBatch}${materialBatch}${i}`, gaugeBatch, materialBatch })),
      ),
    );
    const { strata } = drawSample({ devices: mixed, count: 6, seed: SEED });
    expect(strata.map((s) => [s.gaugeBatch, s.materialBatch, s.devices, s.drawn])).toEqual([
      ["A", "X", 2, 1],
      ["A", null, 2, 1],
      ["B", "X", 2, 1],
      ["B", null, 2, 1],
      [null, "X", 2, 1],
      [null, null, 2, 1],
    ]);
  });

  it("keeps this draw for ever: another one under the same name would break records", () => {
    expect(drawSample({ devices, count: 10, seed: SEED })).toMatchInlineSnapshot(`
      {
        "method": "balanced over gauge and material batches, xoshiro128**, draw 1",
        "serials": [
          "G1-0001",
          "G1-0247",
          "G1-0251",
          "G1-0489",
          "G1-0527",
          "G1-0578",
          "G2-0057",
          "G2-0121",
          "G2-0232",
          "G3-0091",
        ],
        "strata": [
          {
            "devices": 600,
            "drawn": 6,
            "gaugeBatch": "G1",
            "materialBatch": null,
          },
          {
            "devices": 300,
            "drawn": 3,
            "gaugeBatch": "G2",
            "materialBatch": null,
          },
          {
            "devices": 100,
            "drawn": 1,
            "gaugeBatch": "G3",
            "materialBatch": null,
          },
        ],
      }
    `);
  });

  it("leaves no equal stratum always behind", () => {
    const twenty = lot(Object.fromEntries(Array.from({ length: 20 }, (_, i) => [`G${i + 10}`, 50])));
    const reached = new Set<string>();
    for (let i = 1; i <= 40; i++)
      for (const serial of drawSample({ devices: twenty, count: 5, seed: i.toString(16).padStart(32, "9") }).serials)
        reached.add(serial.slice(0, 3));
    expect(reached.size).toBe(20);
  });

  it("draws every device about as often as any other", () => {
    const ten = lot({ G1: 10 });
    const counts = new Map<string, number>();
    const seeds = randomSource(SEED);
    const trials = 4000;
    for (let i = 0; i < trials; i++) {
      const seed = [1, 2, 3, 4].map(() => seeds.nextWord().toString(16).padStart(8, "0")).join("");
      for (const serial of drawSample({ devices: ten, count: 3, seed }).serials)
        counts.set(serial, (counts.get(serial) ?? 0) + 1);
    }
    // Binomial of 4,000 draws at 0.3: a deviation of 29; five of them are let through.
    for (const count of counts.values()) expect(Math.abs(count - 0.3 * trials)).toBeLessThan(5 * 29);
    expect(counts.size).toBe(10);
  });

  it.each([0, -1, 1001, 2.5, Number.NaN])("refuses to draw %d of 1,000", (count) => {
    expect(() => drawSample({ devices, count, seed: SEED })).toThrow(
      expect.objectContaining({ code: "draw.count_invalid" }),
    );
  });

  it("refuses a serial named twice", () => {
    const twice = [...devices, devices[0] as DrawCandidate];
    expect(() => drawSample({ devices: twice, count: 5, seed: SEED })).toThrow(
      expect.objectContaining({ code: "draw.serial_repeated" }),
    );
  });

  const batch = fc.option(fc.constantFrom("A", "B", "C"), { nil: null });
  const anyLot = fc.uniqueArray(
    fc.record({ serial: fc.string({ minLength: 1 }), gaugeBatch: batch, materialBatch: batch }),
    {
      selector: (device) => device.serial,
      minLength: 1,
      maxLength: 80,
    },
  );

  it("draws as many as asked, each once, whatever the order, and within one of the share", () => {
    fc.assert(
      fc.property(anyLot, fc.double({ min: 0, max: 1, noNaN: true }), (all, part) => {
        const count = Math.max(1, Math.round(part * all.length));
        const draw = drawSample({ devices: all, count, seed: SEED });
        const again = drawSample({ devices: [...all].reverse(), count, seed: SEED });
        expect(again).toEqual(draw);
        expect(new Set(draw.serials).size).toBe(count);
        expect(draw.serials.every((serial) => all.some((device) => device.serial === serial))).toBe(true);
        expect(draw.strata.reduce((sum, stratum) => sum + stratum.drawn, 0)).toBe(count);
        for (const { devices: size, drawn } of draw.strata) {
          expect(drawn).toBeLessThanOrEqual(size);
          if (count >= draw.strata.length) expect(drawn).toBeGreaterThanOrEqual(1);
          const share = (count * size) / all.length;
          expect(drawn).toBeLessThan(Math.max(share, 1) + 1);
          if (count < draw.strata.length) expect(drawn).toBeGreaterThan(share - 1);
        }
      }),
    );
  });
});
