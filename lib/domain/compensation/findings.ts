import { DEVICE_KINDS } from "./finding-kinds/device-kinds";
import { IMPORT_KINDS } from "./finding-kinds/import-kinds";
import { LOT_KINDS } from "./finding-kinds/lot-kinds";
import { RUN_KINDS } from "./finding-kinds/run-kinds";
import type { Facts, Kind } from "./finding-kinds/words";
import type { Finding } from "./types";

/**
 * Every finding the arithmetic can make. hard: the numbers are invalid or the contract forbids them; soft: they may be
 * right, which a person has to judge and say why; note: worth knowing, nothing to decide.
 */
const KINDS = { ...RUN_KINDS, ...DEVICE_KINDS, ...LOT_KINDS, ...IMPORT_KINDS } as const satisfies Record<string, Kind>;

export type FindingCode = keyof typeof KINDS;

/** Where a finding stands and what it rests on. */
export interface FindingPlace {
  serial?: string | null;
  point?: number | null;
  data?: Facts;
}

/** A finding with its severity and sentence from the table. */
export function makeFinding(code: FindingCode, place: FindingPlace = {}): Finding {
  const { serial = null, point = null, data } = place;
  const { severity, words } = KINDS[code];
  return { code, severity, serial, point, message: words(data ?? {}), ...(data && { data }) };
}
