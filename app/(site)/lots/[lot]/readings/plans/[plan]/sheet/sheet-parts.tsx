import type { ReactNode } from "react";
import { formatDate } from "@/lib/domain/format/time";
import type { RunPlanView } from "@/schemas/api/run-plans";

/** A part of the sheet under its heading. */
export function Block({ title, note, children }: { title: string; note?: string; children: ReactNode }) {
  return (
    <section className="mt-5">
      <h2 className="flex flex-wrap items-baseline gap-x-3 border-b border-rule pb-1 text-sm font-[650]">
        {title}
        {note ? <span className="text-xs font-normal text-ink-soft">{note}</span> : null}
      </h2>
      <div className="mt-2">{children}</div>
    </section>
  );
}

/** A box to tick by hand. */
export function TickBox() {
  return <span aria-hidden="true" className="inline-block size-3.5 flex-none translate-y-0.5 border border-ink" />;
}

/** A line to write on, with what belongs on it under it. */
export function WriteLine({ label, className = "" }: { label: string; className?: string }) {
  return (
    <div className={className}>
      <div className="h-7 border-b border-ink" />
      <p className="text-xs text-ink-soft">{label}</p>
    </div>
  );
}

/** Equipment to be used, to be ticked, with its certificate and date. */
export function EquipmentBoxes({ equipment, today }: { equipment: RunPlanView["equipment"]; today: string }) {
  return (
    <Block title="Equipment">
      {equipment.length === 0 ? <p>None was planned. Write down what is used:</p> : null}
      <ul className="flex flex-col gap-1">
        {equipment.map((one) => (
          <li key={one.code} className="flex gap-2.5">
            <TickBox />
            <span>
              <span className="font-mono">{one.code}</span>, {one.kind}, certificate {one.certificate}, due{" "}
              {formatDate(one.calibratedUntil)}
              {one.calibratedUntil < today ? <b>, past its date</b> : null}
            </span>
          </li>
        ))}
      </ul>
      <WriteLine label="Other equipment used, with its code" className="mt-1" />
    </Block>
  );
}

/** Who did it, who looked at it, and what went otherwise. */
export function SignatureLines() {
  return (
    <Block title="Deviations and signatures">
      <WriteLine label="What went otherwise than planned, with point, place and time" />
      <WriteLine label="" />
      <WriteLine label="" />
      <div className="mt-3 grid grid-cols-[2fr_1fr] gap-x-8 gap-y-2">
        <WriteLine label="Run by, name and signature" />
        <WriteLine label="Date" />
        <WriteLine label="Looked at by, name and signature" />
        <WriteLine label="Date" />
      </div>
    </Block>
  );
}
