import { readFileSync } from "node:fs";
import { join } from "node:path";
import { type FamilyDocument, familyDocument } from "@/schemas/api/families";

const FOLDER = join(import.meta.dirname, "../../fixtures/golden");

export interface GoldenLot {
  lot: string;
  firmware: string;
  family: FamilyDocument;
  /** The layout document as text. */
  layout: string;
  layoutVersion: string;
  /** Serials of its runs, rising. */
  serials: string[];
  /** Bytes of a file of the example, as `readings-sample.csv`. */
  read: (file: string) => Buffer;
}

function golden(folder: string, lot: string, firmware: string): GoldenLot {
  const read = (file: string) => readFileSync(join(FOLDER, folder, file));
  const layout = read("layout.json").toString("utf8");
  const runs = ["sample", "zero", "span", "verification"].map((purpose) => read(`readings-${purpose}.csv`).toString());
  const serials = runs.flatMap((csv) =>
    csv
      .trim()
      .split("\n")
      .slice(1)
      .map((row) => row.split(",")[0] ?? ""),
  );
  return {
    lot,
    firmware,
    family: familyDocument.parse(JSON.parse(read("family.json").toString("utf8"))),
    layout,
    layoutVersion: JSON.parse(layout).version,
    serials: [...new Set(serials)].sort(),
    read,
  };
}

/** The golden example: family MW-20, lot MW20-2609 with 28 devices. */
export const firstGolden = (): GoldenLot => golden(".", "MW20-2609", "2.3.0");

/** The second golden example: family MW-300, lot MW300-2610 with 15 devices. */
export const secondGolden = (): GoldenLot => golden("second", "MW300-2610", "4.1.0");
