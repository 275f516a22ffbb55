import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FindingsList } from "@/app/_components/findings-list";
import { LegalNote } from "@/app/_components/legal-note";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getDerivationView, getDerivedDevice } from "@/lib/services/derivations/get-derivation";
import { type DeviceEvidence, getDeviceEvidence } from "@/lib/services/derivations/get-device-evidence";
import { getRulesOfLot } from "@/lib/services/lots/lot-rules";
import { Curves } from "./curves";
import { PointsCard } from "./points-card";
import { ReadingsCard } from "./readings-card";
import { ValuesCard } from "./values-card";

export const metadata: Metadata = { title: "Device of a derivation" };

const SOURCES = {
  "own-points": "from its own loaded readings",
  "span-run": "from its span run",
  "sample-mean": "mean of the sample: this device was never loaded",
} as const;

interface PageProps {
  params: Promise<{ derivation: string; serial: string }>;
}

export default async function DerivedDevicePage({ params }: PageProps) {
  const ctx = await pageContext();
  const { derivation, serial: asked } = await params;
  const serial = decodeURIComponent(asked).toUpperCase();
  const view = await orNotFound(getDerivationView(ctx, derivation));
  const device = await orNotFound(getDerivedDevice(ctx, derivation, serial));
  const evidence = await getDeviceEvidence(ctx, derivation, serial);
  const mayExclude = holds(ctx, "engineer") && view.method !== "import" && device.role !== "excluded";
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: view.lot, href: `/lots/${view.lot}` },
          { name: "Coefficients", href: `/lots/${view.lot}/coefficients` },
          { name: "Derivation", href: `/derivations/${view.id}` },
          { name: device.serial },
        ]}
        title={device.serial}
        code
        state={device.state ? stateOf("coefficient-set", device.state) : { tone: "idle", word: "no coefficients" }}
        note={`${device.role}${device.gainFrom ? `, gain ${SOURCES[device.gainFrom]}` : ""}`}
        actions={
          <>
            <LinkButton href={`/trace/${encodeURIComponent(device.serial)}`}>Trace</LinkButton>
            {mayExclude ? (
              <LinkButton
                look="outline"
                href={`/lots/${view.lot}/coefficients?like=${view.id}&exclude=${encodeURIComponent(device.serial)}`}
              >
                Try without it
              </LinkButton>
            ) : null}
          </>
        }
      />
      <Neighbours derivation={view.id} evidence={evidence} />
      <div className="flex flex-col gap-[18px]">
        <ValuesCard device={device} zeroCovariance={evidence.zeroCovariance} />
        {device.curves ? <Curves curves={device.curves} rules={await getRulesOfLot(ctx, view.lot)} /> : null}
        <Card title="Findings">
          <FindingsList findings={device.findings} empty="Nothing to remark on this device." />
        </Card>
        {device.points.length > 0 ? <PointsCard device={device} /> : null}
        <ReadingsCard readings={evidence.readings} />
        {device.curves ? <LegalNote /> : null}
      </div>
    </>
  );
}

/** The devices before and after this one, in the order of the serials. */
function Neighbours({ derivation, evidence }: { derivation: string; evidence: DeviceEvidence }) {
  const { previous, next } = evidence;
  const href = (serial: string) => `/derivations/${derivation}/${encodeURIComponent(serial)}`;
  return (
    <nav aria-label="Devices of this derivation" className="mb-4 flex flex-wrap gap-2.5 print:hidden">
      {previous ? (
        <LinkButton href={href(previous)}>
          <span aria-hidden="true">←</span> <span className="sr-only">Device before: </span>
          <span className="font-mono text-sm">{previous}</span>
        </LinkButton>
      ) : null}
      {next ? (
        <LinkButton href={href(next)}>
          <span className="sr-only">Device after: </span>
          <span className="font-mono text-sm">{next}</span> <span aria-hidden="true">→</span>
        </LinkButton>
      ) : null}
    </nav>
  );
}
