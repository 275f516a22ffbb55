import { id } from "@/schemas/api/common";

/** What the address of the page names; every part may be missing or nonsense. */
export interface Chosen {
  kind?: string;
  /** Packages and images: lots whose packages are offered, the packages, and the serials. */
  lot?: string;
  toLot?: string;
  from?: string;
  to?: string;
  serial?: string;
  toSerial?: string;
  /** Layouts. */
  family?: string;
  fromLayout?: string;
  toLayout?: string;
}

export type CompareKind = "packages" | "images" | "file" | "layouts";

const KINDS: readonly string[] = ["packages", "images", "file", "layouts"] satisfies CompareKind[];

/** What is compared: as asked for, else by what is named. */
export function kindOf({ kind, family, toSerial }: Chosen): CompareKind {
  if (kind !== undefined && KINDS.includes(kind)) return kind as CompareKind;
  if (family !== undefined) return "layouts";
  return toSerial === undefined ? "packages" : "images";
}

/** A package id, where the text is one. */
export function packageIdOf(text: string | undefined): string | undefined {
  return id.safeParse(text).data;
}

export const serialOf = (text: string | undefined): string | undefined => text?.trim().toUpperCase() || undefined;
