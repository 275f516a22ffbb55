import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Notice } from "@/app/_components/notice";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import { READERS, ROLES } from "@/lib/domain/roles";
import { holds, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { DumpCheck } from "../dump-check";
import { RememberSerial } from "../recent-serials";
import { CarriedCard } from "./carried-card";
import { DriftCard } from "./drift-card";
import { History } from "./history";
import { Limits } from "./limits";
import { type LoadedTrace, loadTrace } from "./load-trace";
import { OriginCard } from "./origin-card";
import { ProofLine } from "./proof-line";
import { ReportEvent } from "./report-event";
import { ValuesCard } from "./values-card";

interface PageProps {
  params: Promise<{ serial: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: decodeURIComponent((await params).serial).toUpperCase() };
}

export default async function SerialPage({ params }: PageProps) {
  const ctx = await pageContext(ROLES);
  const loaded = await loadTrace(ctx, (await params).serial);
  const { trace, origin, derived, proof } = loaded;
  const reader = holds(ctx, ...READERS);
  const mayCheck = holds(ctx, "engineer", "reviewer", "service");
  const mayReport = holds(ctx, "engineer", "service") && !trace.scrapped;
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Trace", href: "/trace" }, { name: "Serial" }]}
        title={trace.serial}
        code
        state={stateOf("trace", trace.state)}
        note={<Whose trace={trace} linked={reader} />}
      />
      <RememberSerial serial={trace.serial} />
      <div className="grid grid-cols-1 items-start gap-[18px] lg:grid-cols-[minmax(0,1fr)_minmax(340px,420px)] lg:grid-rows-[auto_1fr]">
        <div className="flex min-w-0 flex-col gap-[18px]">
          {trace.held ? (
            <Notice tone="bad" title="Held">
              No station may write it and it is packed no more. It goes on when a second person has ended the hold.
            </Notice>
          ) : null}
          <CarriedCard trace={trace} origin={origin} />
          {origin ? (
            <ValuesCard origin={origin} derived={derived} />
          ) : (
            <OwnCoefficients loaded={loaded} linked={reader} />
          )}
          {proof ? <ProofLine proof={proof} carried={trace.current?.imageSha256 ?? null} linked={reader} /> : null}
          <div className="grid grid-cols-2 gap-2.5 sm:max-w-[480px] print:hidden">
            {mayCheck ? (
              <LinkButton href="#dump" look="primary" wide>
                Check a dump
              </LinkButton>
            ) : null}
            <LinkButton href={`/trace/${encodeURIComponent(trace.serial)}/record`} look="outline" wide>
              Print record
            </LinkButton>
          </div>
        </div>
        <div className="flex min-w-0 flex-col gap-[18px] lg:row-span-2">
          <section aria-labelledby="history">
            <div className="mb-1 flex items-center gap-3">
              <h2 id="history" className="text-md">
                History
              </h2>
              {mayReport ? (
                <div className="ml-auto">
                  <ReportEvent
                    serial={trace.serial}
                    held={trace.held}
                    shipped={trace.shipped}
                    oneTimeCode={await hasOneTimeCode(ctx)}
                  />
                </div>
              ) : null}
            </div>
            <History entries={trace.history} linked={reader} />
          </section>
          <Card title="What this does not prove">
            <Limits trace={trace} origin={origin} derived={derived} proof={proof} />
          </Card>
        </div>
        <div className="flex min-w-0 flex-col gap-[18px]">
          {mayCheck ? (
            <div id="dump" className="scroll-mt-20 print:hidden">
              <Card
                title="Check a dump"
                note={`what was read from ${trace.serial}'s memory, against what should be there`}
              >
                <DumpCheck serial={trace.serial} />
              </Card>
            </div>
          ) : null}
          {derived?.curves ? <DriftCard curves={derived.curves} /> : null}
          {origin && reader ? <OriginCard origin={origin} lot={trace.lot} family={trace.family} /> : null}
        </div>
      </div>
    </>
  );
}

function Whose({ trace, linked }: { trace: LoadedTrace["trace"]; linked: boolean }) {
  const board = trace.hardwareId ? ` · board ${trace.hardwareId}` : "";
  const rest = `${trace.firmware ? ` · firmware ${trace.firmware}` : ""}${board}${trace.shipped ? " · shipped" : ""}`;
  return linked ? (
    <>
      <Link href={`/families/${trace.family}`}>{trace.family}</Link> · lot{" "}
      <Link href={`/lots/${trace.lot}`}>{trace.lot}</Link>
      {rest}
    </>
  ) : (
    <>
      {trace.family} · lot {trace.lot}
      {rest}
    </>
  );
}

/** Where no image holds them yet: what was derived, and in which state it is. */
function OwnCoefficients({ loaded, linked }: { loaded: LoadedTrace; linked: boolean }) {
  const { coefficients } = loaded.trace;
  if (!coefficients)
    return (
      <Card title="No coefficients yet">
        <p className="text-sm text-ink-soft">
          Readings of {loaded.trace.serial} have to be uploaded and derived first.{" "}
          {linked ? <Link href={`/lots/${loaded.trace.lot}/readings`}>Readings of {loaded.trace.lot}</Link> : null}
        </p>
      </Card>
    );
  return (
    <Card title="Coefficients, not in any released image">
      <p className="text-sm text-ink-soft">
        <StateMark {...stateOf("coefficient-set", coefficients.state)} /> as {coefficients.role}.{" "}
        {linked ? (
          <Link href={`/derivations/${coefficients.derivation}/${loaded.trace.serial}`}>Look at them</Link>
        ) : null}
      </p>
    </Card>
  );
}
