import { describe, expect, it } from "vitest";
import { listBatchChanges, mergeGivenDevices } from "@/lib/domain/batches";
import { readDeviceTable } from "@/lib/domain/device-table";
import { finish } from "@/lib/domain/steps";

const device = (serial: string, gaugeBatch: string | null = null, materialBatch: string | null = null) => ({
  serial,
  gaugeBatch,
  materialBatch,
});

describe("readDeviceTable", () => {
  it.each([
    ["commas", "s-1,g-1,m-1\ns-2,,m-2\ns-3\n"],
    ["semicolons and quotation marks", '"S-1";"G-1";"M-1"\r\nS-2;;M-2\r\nS-3;;\r\n'],
    ["tabs, as a spreadsheet's cells are pasted", "S-1\tG-1\tM-1\n\nS-2\t\tM-2\nS-3\t\t"],
    ["a header in its own order", "Material batch,note,Serial,gauge_batch\nM-1,x,S-1,G-1\nM-2,y,S-2,\n,,S-3,"],
  ])("takes lines with %s", (_, text) => {
    expect(readDeviceTable(text)).toEqual({
      devices: [device("S-1", "G-1", "M-1"), device("S-2", null, "M-2"), device("S-3")],
      refused: [],
    });
  });

  it("names the line and the reason of what it can't take, and never guesses", () => {
    const text = "S-1,G-1\nserial,gauge_batch\n,G-1\nS 2,G-1\nS-3,=1+1\nS-1,G-2\nS-4,G,M,X";
    const { devices, refused } = readDeviceTable(text);
    expect(devices).toEqual([device("S-1", "G-1"), device("SERIAL", "GAUGE_BATCH")]);
    expect(refused.map(({ line, why }) => [line, why])).toEqual([
      [3, "has no serial"],
      [4, "has no serial"],
      [5, "has a batch that is no code"],
      [6, "names S-1 again, as line 1"],
      [7, "has more cells than columns"],
    ]);
  });
});

describe("batches", () => {
  it("put together what was told of one serial, and refuse a contradiction", () => {
    const merged = finish(
      mergeGivenDevices([{ serial: "A" }, { serial: "A", gaugeBatch: "G" }, { serial: "A", materialBatch: "M" }]),
    );
    expect([...merged.values()]).toEqual([device("A", "G", "M")]);
    expect(() => finish(mergeGivenDevices([device("A", "G"), device("A", "H")]))).toThrow(
      expect.objectContaining({ code: "device.batches_contradict" }),
    );
  });

  it("change what is told and new, and tell a first word from a correction", () => {
    const known = [device("A"), device("B", "G"), device("C", "G", "M"), device("D", "G")];
    const told = [device("A", "G"), device("B", "G"), device("C", "H"), device("D", null, "M")];
    const given = finish(mergeGivenDevices(told));
    expect(finish(listBatchChanges(known, given)).map(({ device: one, ...change }) => [one.serial, change])).toEqual([
      ["A", { gaugeBatch: "G", materialBatch: null, corrects: false }],
      ["C", { gaugeBatch: "H", materialBatch: "M", corrects: true }],
      ["D", { gaugeBatch: "G", materialBatch: "M", corrects: false }],
    ]);
  });
});
