import type { ReactNode } from "react";
import { groupDigest } from "@/lib/domain/format/digest";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import type { ReleaseRecord } from "@/lib/services/packages/get-release-record";

export function Section({ title, children }: { title: string; children: ReactNode }) {
  return (
    <section className="mt-4 break-inside-avoid">
      <h2 className="mb-1 text-base">{title}</h2>
      {children}
    </section>
  );
}

/** A name under what it signed. */
export function Signature({ name, as, meaning, at }: { name: string; as: string; meaning: string; at: string }) {
  return (
    <p className="py-0.5">
      <span className="font-semibold">{name}</span>, {as}, {formatDateTime(at)}: “{meaning}”
    </p>
  );
}

/** A digest or signature, whole, in groups of eight. */
export function HexLine({ name, value }: { name: string; value: string }) {
  return (
    <p className="grid gap-x-4 py-0.5 sm:grid-cols-[14rem_1fr] print:grid-cols-[12rem_1fr]">
      <span className="text-ink-soft">{name}</span>
      <span className="font-mono text-xs wrap-anywhere">{groupDigest(value).join(" ")}</span>
    </p>
  );
}

/** Findings that were accepted, those with the same reason together. */
export function AcceptedFindings({ findings }: { findings: ReleaseRecord["acknowledgements"] }) {
  if (findings.length === 0) return null;
  const groups = new Map<string, ReleaseRecord["acknowledgements"]>();
  for (const one of findings) {
    const key = JSON.stringify([one.finding, one.name, one.reason]);
    groups.set(key, [...(groups.get(key) ?? []), one]);
  }
  return (
    <Section title="Findings accepted with a reason">
      <ul>
        {[...groups].map(([key, [first, ...more]]) =>
          first ? (
            <li key={key}>
              <span className="font-mono">{first.finding}</span>
              {first.serial ? <span className="font-mono"> {first.serial}</span> : null}
              {more.length > 0 ? ` and ${formatNumberOf(more.length, "more", "more")}` : ""}, {first.name}: “
              {first.reason}”
            </li>
          ) : null,
        )}
      </ul>
    </Section>
  );
}

/** Sensors, chambers, loads and readers behind the readings, each certificate once. */
export function EquipmentUsed({ equipment }: { equipment: ReleaseRecord["equipment"] }) {
  const once = new Map(equipment.map((one) => [`${one.code} ${one.certificate}`, one]));
  if (once.size === 0) return null;
  return (
    <Section title="Equipment">
      <ul>
        {[...once.values()].map((one) => (
          <li key={`${one.code}${one.certificate}`}>
            {one.kind} <span className="font-mono">{one.code}</span>, certificate {one.certificate}, due{" "}
            {one.calibratedUntil}
          </li>
        ))}
      </ul>
    </Section>
  );
}
