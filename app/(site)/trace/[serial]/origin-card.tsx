import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { TimeText } from "@/app/_components/time-text";
import { formatFigure } from "@/lib/domain/format/figure";
import type { DeviceOrigin } from "@/lib/services/trace/get-device-origin";

export interface OriginCardProps {
  origin: DeviceOrigin;
  lot: string;
  family: string;
}

/** The way back from the bytes to the readings: package, derivation, runs, layout, family revision, and who signed each. */
export function OriginCard({ origin, lot, family }: OriginCardProps) {
  const { derivation, layout, revision } = origin;
  return (
    <Card title="Where it comes from" note="from the bytes back to the readings">
      <ol className="text-sm">
        <Step
          title={
            <Link href={`/packages/${origin.package.id}`}>
              Package {origin.package.version} of {lot}
            </Link>
          }
          digest={origin.package.digest}
          signed={signersOf(origin, `Package ${origin.package.version}`)}
        >
          built by {origin.package.builder}, <TimeText at={origin.package.builtAt} />, for firmware{" "}
          {origin.package.firmware}
          {origin.image.hardwareId ? `, board ${origin.image.hardwareId}` : ""}
        </Step>
        <Step
          title={<Link href={`/families/${family}/layouts/${layout.version}`}>Layout {layout.version}</Link>}
          digest={layout.sha256}
          signed={signersOf(origin, `Layout ${layout.version}`)}
        >
          which byte means what
        </Step>
        <Step
          title={
            <Link href={`/derivations/${derivation.id}`}>
              Derivation, {derivation.method}, order {derivation.order}
            </Link>
          }
          digest={derivation.sha256}
          signed={signersOf(origin, "Coefficients")}
        >
          by {derivation.deriver}, <TimeText at={derivation.derivedAt} />, this device as {derivation.role}
          {derivation.state && derivation.state !== "approved" ? `, its set is ${derivation.state} now` : ""}
        </Step>
        {origin.runs.map((run) => (
          <Step
            key={run.id}
            title={
              <Link href={`/runs/${run.id}`}>{`${run.purpose[0]?.toUpperCase()}${run.purpose.slice(1)} run`}</Link>
            }
            digest={run.sha256}
          >
            uploaded by {run.person}, <TimeText at={run.createdAt} />
            {run.superseded ? ", superseded since" : ""}. {ownText(run.own)}
            {run.equipment.length > 0
              ? ` Read with ${run.equipment.map(({ code, certificate }) => `${code} (certificate ${certificate})`).join(", ")}.`
              : ""}
          </Step>
        ))}
        <Step
          title={
            <Link href={`/families/${family}?revision=${revision.number}`}>
              {family}, revision {revision.number}
            </Link>
          }
          digest={revision.sha256}
          signed={signersOf(origin, `Family revision ${revision.number}`)}
        >
          capacity, nominal output, class and temperature range
        </Step>
      </ol>
    </Card>
  );
}

function ownText(own: DeviceOrigin["runs"][number]["own"]): string {
  if (!own) return "This device is not in it.";
  const low = formatFigure(own.lowC, { digits: 1 });
  const high = formatFigure(own.highC, { digits: 1 });
  const range = own.highC - own.lowC < 1 ? `${low} °C` : `${low} to ${high} °C`;
  return `This device: ${own.rows} readings at ${range}, ${own.loaded ? "loaded and unloaded" : "unloaded only"}.`;
}

function signersOf(origin: DeviceOrigin, what: string): string[] {
  return [...new Set(origin.signatures.filter((one) => one.what === what).map((one) => one.name))];
}

interface StepProps {
  title: React.ReactNode;
  digest: string;
  signed?: readonly string[];
  children: React.ReactNode;
}

function Step({ title, digest, signed, children }: StepProps) {
  return (
    <li className="grid gap-x-4 gap-y-0.5 border-b border-rule/55 py-2 last:border-0 sm:grid-cols-[1fr_auto]">
      <div className="min-w-0">
        <div className="font-semibold">{title}</div>
        <div className="text-ink-soft">{children}</div>
        {signed && signed.length > 0 ? <div className="text-verdigris">signed by {signed.join(", ")}</div> : null}
      </div>
      <div className="text-ink-soft">{digest ? <Digest value={digest} short /> : null}</div>
    </li>
  );
}
