import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { writeContent } from "@/lib/domain/writes/write-content";
import type { WriteReport } from "@/schemas/api/stations";

const report: WriteReport = {
  id: "0190b2a4-0000-7000-8000-00000000000a",
  counter: 7,
  serial: "MW20-1",
  package: "0190b2a4-0000-7000-8000-0000000000ff",
  imageSha256: "a".repeat(64),
  result: "written",
  readbackSha256: "a".repeat(64),
  startedAt: "2026-12-01T10:00:00Z",
  finishedAt: "2026-12-01T10:00:04.5Z",
  operator: "O. Perator",
};

describe("writeContent", () => {
  it("is the same for spellings that mean the same", () => {
    const spelt: WriteReport = {
      ...report,
      id: report.id.toUpperCase(),
      startedAt: "2026-12-01T10:00:00.000Z",
      finishedAt: "2026-12-01T10:00:04.500Z",
      serialBefore: null,
      zeroMvV: null,
      detail: undefined,
    };
    expect(writeContent(spelt)).toBe(writeContent(report));
  });

  it.each([
    { counter: 8 },
    { serial: "MW20-2" },
    { package: "other" },
    { imageSha256: "b".repeat(64) },
    { result: "failed" },
    { readbackSha256: null },
    { serialBefore: "MW20-1" },
    { hardwareId: "B1" },
    { firmware: "2.3.0" },
    { zeroMvV: 0 },
    { deviceTemp: 0 },
    { startedAt: "2026-12-01T10:00:00.001Z" },
    { finishedAt: "2026-12-01T10:00:04.501Z" },
    { operator: "" },
    { detail: "" },
  ] as Partial<WriteReport>[])("differs with %j", (change) => {
    expect(writeContent({ ...report, ...change })).not.toBe(writeContent(report));
  });

  it("does not depend on the order of members", () => {
    fc.assert(
      fc.property(fc.shuffledSubarray(Object.keys(report), { minLength: Object.keys(report).length }), (names) => {
        const shuffled = Object.fromEntries(
          names.map((name) => [name, report[name as keyof WriteReport]]),
        ) as WriteReport;
        expect(writeContent(shuffled)).toBe(writeContent(report));
      }),
    );
  });
});
