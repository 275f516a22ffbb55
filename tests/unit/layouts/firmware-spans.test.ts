import fc from "fast-check";
import semver from "semver";
import { describe, expect, it } from "vitest";
import { firmwareSpans, runsOf } from "@/lib/domain/firmware-spans";

describe("firmwareSpans", () => {
  it("cuts where any range begins or ends", () => {
    const { stops, covers } = firmwareSpans([">=2.1.0 <3.0.0", "^2.4.0", "~2.1.0"]);
    expect(stops).toEqual(["2.1.0", "2.2.0", "2.4.0", "3.0.0"]);
    expect(covers).toEqual([
      [true, true, true, false],
      [false, false, true, false],
      [true, false, false, false],
    ]);
  });

  it("takes single versions, open ends and what is no range", () => {
    expect(firmwareSpans(["2.3.0", ">2.3.0", "nothing"])).toEqual({
      stops: ["2.3.0", "2.3.1"],
      covers: [
        [true, false],
        [false, true],
        [false, false],
      ],
    });
    expect(firmwareSpans(["*"]).covers).toEqual([[true]]);
    expect(firmwareSpans([])).toEqual({ stops: [], covers: [] });
    expect(firmwareSpans([">=2.0.0"], ["1.5.0"]).stops).toEqual(["1.5.0", "2.0.0"]);
  });

  it("says of every version what the range says", () => {
    const version = fc.tuple(fc.nat(4), fc.nat(4), fc.nat(4)).map((numbers) => numbers.join("."));
    const range = fc.oneof(
      version.map((one) => `^${one}`),
      version.map((one) => `~${one}`),
      fc.tuple(version, version).map(([a, b]) => `>=${a} <${b}`),
      fc.tuple(version, version).map(([a, b]) => `>${a} <=${b} || ${a}`),
    );
    fc.assert(
      fc.property(fc.array(range, { minLength: 1, maxLength: 3 }), version, (ranges, probe) => {
        const { stops, covers } = firmwareSpans(ranges);
        const stretch = stops.findLastIndex((stop) => semver.lte(stop, probe));
        ranges.forEach((one, i) => {
          expect(covers[i]?.[stretch] ?? false).toBe(semver.satisfies(probe, one));
        });
      }),
    );
  });
});

describe("runsOf", () => {
  it("joins neighbours", () => {
    expect(runsOf([true, true, false, true])).toEqual([
      [0, 1],
      [3, 3],
    ]);
    expect(runsOf([])).toEqual([]);
  });
});
