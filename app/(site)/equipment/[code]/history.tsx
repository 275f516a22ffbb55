import Link from "next/link";
import { TimeText } from "@/app/_components/time-text";
import { type EquipmentKind, plainDigits, UNCERTAINTY_UNITS } from "@/lib/domain/format/certificate";
import { formatDate } from "@/lib/domain/format/time";
import type { ChamberPosition } from "@/schemas/api/equipment";
import type { LedgerEntry } from "@/schemas/api/ledger";

/** Values of a certificate as events carry them; older events know neither factor nor places. */
interface Values {
  certificate?: string;
  calibratedUntil?: string;
  uncertainty?: number;
  coverageFactor?: number;
  positions?: ChamberPosition[];
}

/** Every change of a certificate, old value and new, newest first. */
export function History({ kind, events }: { kind: EquipmentKind; events: readonly LedgerEntry[] }) {
  return (
    <ol className="flex flex-col">
      {events.map((event) => (
        <li key={event.seq} className="border-b border-rule/55 py-2 last:border-0">
          <p className="flex flex-wrap items-baseline gap-x-3 text-sm">
            <Link href={`/ledger/${event.seq}`} className="font-semibold">
              {event.action === "equipment.added" ? "Added" : "Changed"}
            </Link>
            <span>{event.actorName ?? event.actor}</span>
            <span className="text-ink-soft">
              <TimeText at={event.at} />
            </span>
          </p>
          <ul className="mt-0.5 text-sm">
            {linesOf(kind, event).map((line) => (
              <li key={line}>{line}</li>
            ))}
          </ul>
        </li>
      ))}
    </ol>
  );
}

function linesOf(kind: EquipmentKind, { action, data }: LedgerEntry): string[] {
  if (action === "equipment.added") return textsOf(kind, data as Values).map(([name, value]) => `${name} ${value}`);
  const before = new Map(textsOf(kind, (data.from ?? {}) as Values));
  return textsOf(kind, (data.to ?? {}) as Values)
    .filter(([name, value]) => before.get(name) !== value)
    .map(([name, value]) => `${name} ${before.get(name) ?? "none"} → ${value}`);
}

function textsOf(kind: EquipmentKind, values: Values): [string, string][] {
  const { certificate, calibratedUntil, uncertainty, coverageFactor, positions } = values;
  const texts: [string, string | undefined][] = [
    ["Certificate", certificate],
    ["Calibrated until", calibratedUntil && formatDate(calibratedUntil)],
    ["Uncertainty", uncertainty === undefined ? undefined : `± ${plainDigits(uncertainty)} ${UNCERTAINTY_UNITS[kind]}`],
    ["Coverage factor", coverageFactor === undefined ? undefined : plainDigits(coverageFactor)],
    ["Places", kind === "chamber" ? positions && placesText(positions) : undefined],
  ];
  return texts.filter((entry): entry is [string, string] => entry[1] !== undefined);
}

function placesText(positions: readonly ChamberPosition[]): string {
  if (positions.length === 0) return "none";
  return positions
    .map((place) => `${place.position} ${plainDigits(place.deviationK)} ± ${plainDigits(place.uncertaintyK)} K`)
    .join(", ");
}
