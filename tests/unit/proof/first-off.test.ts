import { describe, expect, it } from "vitest";
import { checkFirstOff } from "@/lib/domain/package-checks/first-off";
import { type DeviceProof, openFirstOff, summariseProofs } from "@/lib/domain/proof/first-off";

const proof = (change: Partial<DeviceProof> = {}): DeviceProof => ({
  serial: "A-1",
  run: "r1",
  readAt: "2026-04-02T08:00:00.000Z",
  layout: "1.0.0",
  firmware: "2.3.0",
  state: "agrees",
  worst: { ratio: 0.2 },
  shown: [
    { name: "zero", shown: true },
    { name: "gainTc", shown: false },
  ],
  ...change,
});

describe("summariseProofs", () => {
  it("has nothing to say without a judged device", () => {
    expect(summariseProofs([])).toEqual([]);
    expect(summariseProofs([proof({ state: "not-judged" }), proof({ layout: null })])).toEqual([]);
  });

  it("keeps layouts and firmware versions apart, the newest first", () => {
    const later = "2026-05-01T08:00:00.000Z";
    const found = summariseProofs([
      proof(),
      proof({ serial: "A-2", layout: "1.1.0", readAt: later }),
      proof({ firmware: "2.4.0" }),
    ]);
    expect(found.map((item) => [item.layout, item.firmware])).toEqual([
      ["1.1.0", "2.3.0"],
      ["1.0.0", "2.3.0"],
      ["1.0.0", "2.4.0"],
    ]);
  });

  it("differs as soon as one device does, and names the larger share of the limit", () => {
    const [found] = summariseProofs([proof(), proof({ serial: "A-2", state: "differs", worst: { ratio: 3.5 } })]);
    expect(found).toMatchObject({ state: "differs", agreed: 1, differed: 1, worstRatio: 3.5 });
  });

  it("lets a later proof of the same device take the place of an earlier one", () => {
    const first = proof({ state: "differs", worst: { ratio: 4 } });
    const second = proof({ run: "r2", readAt: "2026-04-03T08:00:00.000Z" });
    for (const order of [
      [first, second],
      [second, first],
    ])
      expect(summariseProofs(order)).toMatchObject([
        { state: "agrees", run: "r2", agreed: 1, differed: 0, worstRatio: 0.2 },
      ]);
  });

  it("counts a coefficient as shown by devices that agree only", () => {
    const shown = [
      { name: "zero", shown: true },
      { name: "gainTc", shown: true },
    ];
    const [agreeing] = summariseProofs([proof(), proof({ serial: "A-2", shown })]);
    expect(agreeing).toMatchObject({ shown: ["zero", "gainTc"], notShown: [] });
    const [differing] = summariseProofs([proof(), proof({ serial: "A-2", state: "differs", shown })]);
    expect(differing).toMatchObject({ shown: ["zero"], notShown: ["gainTc"] });
  });
});

describe("checkFirstOff", () => {
  it("is no check where nothing was judged: not proven is no pass", () => {
    expect(checkFirstOff(null)).toBeNull();
    expect(checkFirstOff(openFirstOff("1.0.0", "2.3.0"))).toBeNull();
  });

  it("passes what agrees and says what was not shown", () => {
    const [agreeing] = summariseProofs([proof()]);
    const check = checkFirstOff(agreeing ?? null);
    expect(check?.verdict).toBe("pass");
    expect(check?.message).toContain("1 device read with layout 1.0.0 and firmware 2.3.0 did as predicted.");
    expect(check?.message).toContain("Shown to be applied: zero; not shown: gainTc.");
  });

  it("warns where a device did otherwise", () => {
    const [differing] = summariseProofs([proof(), proof({ serial: "A-2", state: "differs", worst: { ratio: 3.5 } })]);
    const check = checkFirstOff(differing ?? null);
    expect(check).toMatchObject({ verdict: "warn", evidence: { differed: 1 } });
    expect(check?.message).toContain("1 device of 2 read with");
  });
});
