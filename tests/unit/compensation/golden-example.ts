import { readFileSync } from "node:fs";
import { join } from "node:path";
import type { FamilyRules, Purpose, Reading, RunReadings } from "@/lib/domain/compensation/types";

const folder = join(import.meta.dirname, "../../fixtures/golden");

export function readJson<T>(path: string): T {
  return JSON.parse(readFileSync(join(folder, path), "utf8")) as T;
}

export function readFamily(path: string): FamilyRules {
  return readJson<FamilyRules>(path);
}

/** Readings of a golden file, whose columns stand in the order of the contract. */
export function readRun(path: string, purpose: Purpose): RunReadings {
  const lines = readFileSync(join(folder, path), "utf8").trim().split("\n").slice(1);
  const readings = lines.map((line, i): Reading => {
    const [serial = "", point, chamberC, soakMin, deviceTemp, loadKg, signalMvV, takenAt = ""] = line.split(",");
    return {
      row: i + 2,
      serial,
      point: Number(point),
      chamberC: Number(chamberC),
      soakMin: Number(soakMin),
      deviceTemp: Number(deviceTemp),
      loadKg: Number(loadKg),
      signalMvV: Number(signalMvV),
      takenAt: takenAt.trim(),
    };
  });
  return { id: path, purpose, readings };
}

/** The four runs of a golden lot. */
export function readLot(prefix: "" | "second/"): RunReadings[] {
  return (["sample", "zero", "span", "verification"] as const).map((purpose) =>
    readRun(`${prefix}readings-${purpose}.csv`, purpose),
  );
}
