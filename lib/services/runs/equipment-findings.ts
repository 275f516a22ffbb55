import type { Finding } from "@/lib/domain/compensation/types";

/** Equipment with the last day its certificate holds, `YYYY-MM-DD`. */
interface Certified {
  code: string;
  certificate: string;
  calibratedUntil: string;
}

/**
 * What the certificates say about a run: each piece of equipment has to be within its period on the day of the last reading.
 * @param lastTakenAt RFC 3339, UTC.
 */
export function listEquipmentFindings(equipment: readonly Certified[], lastTakenAt: string): Finding[] {
  const day = lastTakenAt.slice(0, 10);
  if (equipment.length === 0) {
    const message = "No equipment is named: what these temperatures and loads are traceable to stays open.";
    return [{ code: "equipment.none_named", severity: "note", serial: null, point: null, message }];
  }
  return equipment
    .filter(({ calibratedUntil }) => calibratedUntil < day)
    .map(({ code, certificate, calibratedUntil }) => ({
      code: "equipment.overdue",
      severity: "soft",
      serial: null,
      point: null,
      message: `${code} was due for calibration on ${calibratedUntil} (certificate ${certificate}); the run was taken up to ${day}.`,
      data: { equipment: code, certificate, calibratedUntil, day },
    }));
}
