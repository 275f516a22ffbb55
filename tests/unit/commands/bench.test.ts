import { describe, expect, it } from "vitest";
import bench, { closingLine } from "@/lib/commands/bench";
import { spreadOf } from "../../bench/measure";

describe("npm run bench", () => {
  it("closes with value, goal and whether it is met", () => {
    const upload = { what: "upload", unit: "× csv-parse alone", goal: 5 };
    expect(closingLine({ ...upload, value: 4.218 })).toBe("upload: 4.22 × csv-parse alone (goal: at most 5) met");
    expect(closingLine({ ...upload, value: 5.01 })).toBe("upload: 5.01 × csv-parse alone (goal: at most 5) NOT MET");
    expect(closingLine({ what: "load", value: 12.34, unit: "s" })).toBe("load: 12.3 s");
  });

  it("names the benches there are where one is not known", async () => {
    const run = bench(["nothing"], new AbortController().signal);
    await expect(run).rejects.toThrow(/No bench nothing; there are .*upload/);
  });

  it("takes the median between the two in the middle", () => {
    expect(spreadOf([4, 1, 3])).toEqual({ min: 1, median: 3, max: 4 });
    expect(spreadOf([4, 1, 3, 2])).toEqual({ min: 1, median: 2.5, max: 4 });
    expect(spreadOf([7])).toEqual({ min: 7, median: 7, max: 7 });
  });
});
