import type { Metadata } from "next";
import { MakerMark } from "@/app/_components/frame/maker-mark";
import { LegalNote } from "@/app/_components/legal-note";
import { PrintButton } from "@/app/_components/print-button";
import { SealMark } from "@/app/_components/seal-mark";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import { formatDecoded } from "@/lib/domain/format/field-value";
import { formatDateTime } from "@/lib/domain/format/time";
import { READERS, ROLES } from "@/lib/domain/roles";
import { holds, pageContext } from "@/lib/http/page-context";
import type { DeviceOrigin } from "@/lib/services/trace/get-device-origin";
import type { DeviceTrace } from "@/schemas/api/devices";
import { Limits } from "../limits";
import { loadTrace } from "../load-trace";
import { measuredSentence } from "../measured-sentence";

interface PageProps {
  params: Promise<{ serial: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Device record ${decodeURIComponent((await params).serial).toUpperCase()}` };
}

/** The device record: one sheet of paper that says what a serial carries, from what, signed by whom. */
export default async function RecordPage({ params }: PageProps) {
  const ctx = await pageContext(ROLES);
  const { trace, origin, derived, proof } = await loadTrace(ctx, (await params).serial);
  const reader = holds(ctx, ...READERS);
  return (
    <>
      <div className="print:hidden">
        <TitleRow
          breadcrumb={[
            { name: "Trace", href: "/trace" },
            { name: trace.serial, href: `/trace/${encodeURIComponent(trace.serial)}` },
            { name: "Record" },
          ]}
          title="Device record"
          note="One sheet for the file that goes with the device"
          actions={<PrintButton>Print this record</PrintButton>}
        />
      </div>
      <article className="mx-auto max-w-[820px] rounded border border-rule bg-raised p-5 md:p-8 print:max-w-none print:border-0 print:bg-transparent print:p-0">
        <header className="flex flex-wrap items-start gap-x-6 gap-y-2 border-b-2 border-ink pb-3">
          <div className="min-w-0">
            <p className="flex items-center gap-2 text-sm text-ink-soft">
              <MakerMark size={18} /> Device record
            </p>
            <p className="font-mono text-lg font-semibold">{trace.serial}</p>
          </div>
          <div className="text-sm text-ink-soft sm:ml-auto sm:text-right">
            <div>
              {trace.family} · lot {trace.lot}
            </div>
            <div>
              {trace.firmware ? `firmware ${trace.firmware}` : ""}
              {trace.hardwareId ? ` · board ${trace.hardwareId}` : ""}
            </div>
            <StateMark {...stateOf("trace", trace.state)} />
          </div>
        </header>
        <Carries trace={trace} origin={origin} />
        {origin ? (
          <>
            <Values origin={origin} />
            <p className="mt-2 text-sm text-ink-soft">{measuredSentence(origin, derived)}</p>
            {reader ? <Signed origin={origin} /> : null}
          </>
        ) : null}
        <Happened trace={trace} />
        <h2 className="mt-6 mb-1 text-base">What this record does not prove</h2>
        <Limits trace={trace} origin={origin} derived={derived} proof={proof} />
        <div className="mt-4">
          <LegalNote />
        </div>
        <footer className="mt-5 border-t border-rule pt-2 text-xs text-ink-soft">
          Printed {formatDateTime(ctx.now())} for {ctx.actor.name}. What a paper says may be out of date: the trace of
          the serial is not.
        </footer>
      </article>
    </>
  );
}

function Carries({ trace, origin }: { trace: DeviceTrace; origin: DeviceOrigin | null }) {
  const { current } = trace;
  return (
    <section className="mt-4">
      <h2 className="mb-2 text-base">What it carries</h2>
      {current?.known && origin?.basis === "carried" ? (
        <SealMark
          digest={origin.package.digest}
          above={`${origin.package.version} of ${trace.lot}, written ${formatDateTime(current.writtenAt)} at ${current.station}, read back equal`}
        />
      ) : (
        <p className="text-sm">
          {current
            ? `Not known: the last write, ${formatDateTime(current.writtenAt)} at ${current.station}, ended as ${current.outcome}.`
            : "Nothing was ever written by a station."}
        </p>
      )}
      {origin ? (
        <p className="mt-2 font-mono text-xs text-ink-soft wrap-anywhere">image sha256 {origin.image.sha256}</p>
      ) : null}
    </section>
  );
}

function Values({ origin }: { origin: DeviceOrigin }) {
  return (
    <section className="mt-5">
      <h2 className="mb-1 text-base">
        {origin.basis === "carried" ? "Values, decoded from what was written" : "Values the live release holds for it"}
      </h2>
      <table className="w-full text-sm">
        <thead>
          <tr className="border-b border-rule text-left text-xs text-ink-soft">
            <th scope="col" className="py-1 pr-4">
              Field
            </th>
            <th scope="col" className="py-1 pr-4 text-right">
              Value
            </th>
            <th scope="col" className="py-1 pr-4">
              Unit
            </th>
            <th scope="col" className="py-1">
              Bytes
            </th>
          </tr>
        </thead>
        <tbody>
          {origin.image.fields.map((field) => {
            const shown = formatDecoded(field);
            return (
              <tr key={`${field.name}${field.at}`} className="border-b border-rule/55">
                <th scope="row" className="py-0.5 pr-4 text-left font-normal">
                  {field.name}
                </th>
                <td className="py-0.5 pr-4 text-right font-mono">{shown.text}</td>
                <td className="py-0.5 pr-4 whitespace-nowrap text-ink-soft">{shown.unit}</td>
                <td className="py-0.5 font-mono text-xs wrap-anywhere">{field.raw.toUpperCase()}</td>
              </tr>
            );
          })}
        </tbody>
      </table>
    </section>
  );
}

function Signed({ origin }: { origin: DeviceOrigin }) {
  if (origin.signatures.length === 0) return null;
  return (
    <section className="mt-5">
      <h2 className="mb-1 text-base">Signed</h2>
      <ul className="text-sm">
        {origin.signatures.map((one) => (
          <li key={`${one.what}${one.at}${one.name}`} className="border-b border-rule/55 py-1">
            <span className="font-semibold">{one.what}</span>, {one.name}, {formatDateTime(one.at)}
            <span className="block text-ink-soft">{one.meaning}</span>
          </li>
        ))}
      </ul>
    </section>
  );
}

/** What is printed at most; the trace has all of it. */
const PRINTED_MAX = 24;

function Happened({ trace }: { trace: DeviceTrace }) {
  const shown = trace.history.slice(0, PRINTED_MAX);
  const left = trace.history.length - shown.length;
  return (
    <section className="mt-5 break-inside-auto!">
      <h2 className="mb-1 text-base">History</h2>
      <table className="w-full text-sm">
        <tbody>
          {shown.map((entry, index) => (
            // biome-ignore lint/suspicious/noArrayIndexKey: two things may happen in one moment
            <tr key={index} className="border-b border-rule/55 align-top">
              <td className="w-px py-0.5 pr-4 whitespace-nowrap text-ink-soft">{formatDateTime(entry.at)}</td>
              <td className="py-0.5">
                {entry.what}
                {entry.who ? <span className="text-ink-soft">, {entry.who}</span> : null}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
      {left > 0 ? <p className="mt-1 text-xs text-ink-soft">{left} earlier entries stand in the trace.</p> : null}
    </section>
  );
}
