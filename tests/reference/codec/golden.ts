import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import type { CoefficientValues, ImageSources } from "@/builders/codec/sources";
import type { LayoutDocument } from "@/schemas/documents/layout";

const GOLDEN = join(import.meta.dirname, "../../fixtures/golden");

interface Family {
  referenceC: number;
  capacityKg: number;
  nominalMvV: number;
}

/** A worked example: layout, sources of every device of its package 1.0.0, and what has to come out. */
export interface GoldenExample {
  layout: LayoutDocument;
  compiled: CompiledLayout;
  sources: ImageSources[];
  digests: Record<string, string>;
  /** Intel HEX of the serials that have one in the example. */
  hexes: Map<string, string>;
}

function read<T>(...path: string[]): T {
  return JSON.parse(readFileSync(join(GOLDEN, ...path), "utf8")) as T;
}

export function readGolden(folder: "." | "second", lot: string): GoldenExample {
  const layout = read<LayoutDocument>(folder, "layout.json");
  const family = read<Family>(folder, "family.json");
  const { pooledDevices } = read<{ pooledDevices: Record<string, CoefficientValues> }>(
    folder,
    "expected-coefficients.json",
  );
  const [major = 0, minor = 0, patch = 0] = layout.version.split(".").map(Number);
  const sources = Object.entries(pooledDevices).map(([serial, coefficients]) => ({
    device: { serial },
    lot: { code: lot },
    layout: { major, minor, patch },
    package: { major: 1, minor: 0, patch: 0 },
    coefficients,
    family: { referenceTemperature: family.referenceC, capacity: family.capacityKg, nominalOutput: family.nominalMvV },
  }));
  const hexes = new Map<string, string>();
  for (const { device } of sources) {
    const path = join(GOLDEN, folder, "images", `${device.serial}.hex`);
    if (existsSync(path)) hexes.set(device.serial, readFileSync(path, "utf8"));
  }
  return {
    layout,
    compiled: compileLayout(layout),
    sources,
    digests: read(folder, "images", "sha256-of-bytes.json"),
    hexes,
  };
}
