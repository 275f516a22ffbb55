import { describe, expect, it } from "vitest";
import { formatAddress, formatByte, groupDigest } from "@/lib/domain/format/digest";
import { formatSize } from "@/lib/domain/format/size";
import { formatDate, formatDateTime, formatDuration } from "@/lib/domain/format/time";

describe("formatDateTime", () => {
  it("says the UTC time, whatever offset the text has", () => {
    expect(formatDateTime("2026-03-09T14:12:59.123Z")).toBe("9 Mar 2026, 14:12 UTC");
    expect(formatDateTime("2026-03-01T00:30:00+01:00")).toBe("28 Feb 2026, 23:30 UTC");
    expect(formatDate(new Date("2026-12-31T23:59:59Z"))).toBe("31 Dec 2026");
  });

  it("shows what is no moment as a dash", () => {
    expect(formatDateTime("yesterday")).toBe("—");
    expect(formatDate(null)).toBe("—");
  });
});

describe("formatDuration", () => {
  it.each([
    [0.4, "0 s"],
    [59.6, "1 min"],
    [200, "3 min 20 s"],
    [7_500, "2 h 5 min"],
    [273_600, "3 d 4 h"],
  ])("shows %d s as %s", (seconds, shown) => {
    expect(formatDuration(seconds)).toBe(shown);
  });

  it("shows an unknown time as a dash", () => {
    expect(formatDuration(null)).toBe("—");
    expect(formatDuration(-1)).toBe("—");
  });
});

it.each([
  [1, "1 byte"],
  [128, "128 bytes"],
  [12_400, "12.4 kB"],
  [999_949, "999.9 kB"],
  [999_950, "1.00 MB"],
  [1_250_000, "1.25 MB"],
  [2_000_000_000, "2.00 GB"],
])("shows %d bytes as %s", (bytes, shown) => {
  expect(formatSize(bytes)).toBe(shown);
});

it("groups a digest without losing a digit", () => {
  const digest = "38bcda6342a376f986f1de579e74e0067fe45058418235832bbc8083b8f6fa0c";
  expect(groupDigest(digest)).toHaveLength(8);
  expect(groupDigest(digest).join("")).toBe(digest);
  expect(groupDigest("")).toEqual([]);
});

it("writes addresses and bytes in upper-case hex", () => {
  expect(formatAddress(0x3a)).toBe("003A");
  expect(formatAddress(0x08000000)).toBe("8000000");
  expect(formatByte(10)).toBe("0A");
});
