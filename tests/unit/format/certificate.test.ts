import { describe, expect, it } from "vitest";
import { daysUntil, dueState, formatUncertainty, plainDigits } from "@/lib/domain/format/certificate";

describe("certificates in words", () => {
  it.each([
    ["2026-11-30", "overdue", -1],
    ["2026-12-01", "due-soon", 0],
    ["2026-12-30", "due-soon", 29],
    ["2026-12-31", "in-date", 30],
    ["2028-02-29", "in-date", 455],
  ])("are %s: %s", (date, state, days) => {
    expect([dueState(date, "2026-12-01"), daysUntil(date, "2026-12-01")]).toEqual([state, days]);
  });

  it("tell an uncertainty with its own digits, unit and factor", () => {
    expect(formatUncertainty("sensor", 0.02, 2)).toBe("± 0.02 °C (k = 2)");
    expect(formatUncertainty("reader", 4e-7, 2.05)).toBe("± 0.0000004 mV/V (k = 2.05)");
    expect(formatUncertainty("load", 1234.5, 2)).toBe("± 1234.5 kg (k = 2)");
    expect(plainDigits(-0.11)).toBe("\u22120.11");
  });
});
