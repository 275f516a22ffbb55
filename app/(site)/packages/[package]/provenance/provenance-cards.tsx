import Link from "next/link";
import type { ReactNode } from "react";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { TimeText } from "@/app/_components/time-text";
import { formatGiven, formatNumberOf } from "@/lib/domain/format/figure";
import type { PackageProvenance } from "@/lib/services/packages/get-provenance";

type Derivation = PackageProvenance["derivations"][number];
type Signed = PackageProvenance["layout"]["decisions"];

/** The frozen documents that a package was built with: family revision and layout, each with who published it. */
export function DocumentsCard({ family, layout }: Pick<PackageProvenance, "family" | "layout">) {
  return (
    <Card title="Built with">
      <div className="grid gap-x-8 gap-y-4 text-sm lg:grid-cols-2">
        <Document
          name={
            <Link href={`/families/${family.code}?revision=${family.revision}`}>
              Family {family.code}, revision {family.revision}
            </Link>
          }
          digest={family.sha256}
          digestName="digest of the family revision"
          makers={family.makers}
          decisions={family.decisions}
        />
        <Document
          name={
            <Link href={`/families/${family.code}/layouts/${layout.version}`}>
              Layout {layout.version} of {family.code}
            </Link>
          }
          digest={layout.sha256}
          digestName="digest of the layout"
          makers={layout.makers}
          decisions={layout.decisions}
        />
      </div>
    </Card>
  );
}

function Document(props: {
  name: ReactNode;
  digest: string;
  digestName: string;
  makers: readonly string[];
  decisions: Signed;
}) {
  return (
    <div className="min-w-0">
      <p className="font-semibold">{props.name}</p>
      <Digest value={props.digest} name={props.digestName} />
      <p className="mt-1 text-ink-soft">Written by {props.makers.join(", ") || "nobody on record"}</p>
      <Decisions decisions={props.decisions} />
    </div>
  );
}

/** Who signed what, with the words they signed. */
export function Decisions({ decisions }: { decisions: Signed }) {
  if (decisions.length === 0) return null;
  return (
    <ul className="mt-1 flex flex-col gap-1.5">
      {decisions.map((one) => (
        <li key={`${one.at}${one.name}`} className="border-l-2 border-verdigris/60 pl-3">
          {one.name}, <TimeText at={one.at} />: “{one.meaning}”
          {one.reason ? <span className="block text-ink-soft">{one.reason}</span> : null}
        </li>
      ))}
    </ul>
  );
}

/** One computation of coefficients: what it read, what it left out, who approved it. */
export function DerivationCard({ derivation }: { derivation: Derivation }) {
  const { provenRange, exclude, acknowledgements } = derivation;
  const proven = provenRange
    ? `, proven ${formatGiven(provenRange[0])} to ${formatGiven(provenRange[1])} °C`
    : ", nothing proven";
  return (
    <Card
      title={<Link href={`/derivations/${derivation.id}`}>Coefficients: {derivation.method}</Link>}
      note={`order ${derivation.order}, ${derivation.method === "import" ? "values of a file" : `arithmetic ${derivation.engine}`}${proven}`}
    >
      <div className="flex flex-col gap-3 text-sm">
        <Digest value={derivation.sha256} name="digest of what was computed from" />
        <Runs runs={derivation.runs} />
        {exclude.length > 0 ? (
          <ul>
            {exclude.map((one) => (
              <li key={one.serial}>
                <span className="font-mono">{one.serial}</span> left out by {one.by}: {one.reason}
              </li>
            ))}
          </ul>
        ) : null}
        {acknowledgements.length > 0 ? (
          <p>
            {formatNumberOf(acknowledgements.length, "finding")} accepted with a reason by{" "}
            {[...new Set(acknowledgements.map((one) => one.by))].join(", ")};{" "}
            <Link href={`/derivations/${derivation.id}`}>read them there</Link>.
          </p>
        ) : null}
        <Decisions decisions={derivation.approvals} />
      </div>
    </Card>
  );
}

/** The runs that were read, each by the digest of its very bytes. */
function Runs({ runs }: { runs: Derivation["runs"] }) {
  if (runs.length === 0) return <p className="text-ink-soft">Imported: no readings stand behind these coefficients.</p>;
  return (
    <ul className="border-t border-rule">
      {runs.map((run) => (
        <li
          key={run.id}
          className="grid gap-x-5 gap-y-0.5 border-b border-rule/55 py-2 md:grid-cols-[11rem_minmax(0,1fr)_12rem]"
        >
          <div>
            <Link href={`/runs/${run.id}`} className="font-semibold">
              {run.purpose} run
            </Link>
            <span className="block text-xs text-ink-soft">
              {formatNumberOf(run.rows, "row")}, {formatNumberOf(run.devices, "device")}
            </span>
            {run.supersededBy ? <span className="block text-xs text-ochre">superseded since</span> : null}
          </div>
          <div className="min-w-0">
            <Digest value={run.sha256} name={`digest of the ${run.purpose} run`} />
            <span className="block text-xs text-ink-soft">
              {run.equipment.length === 0 ? "no equipment named" : run.equipment.map(equipmentText).join("; ")}
            </span>
          </div>
          <div>
            {run.uploadedBy}
            <span className="block text-xs text-ink-soft">
              <TimeText at={run.uploadedAt} />
            </span>
          </div>
        </li>
      ))}
    </ul>
  );
}

function equipmentText({
  kind,
  code,
  certificate,
  calibratedUntil,
}: Derivation["runs"][number]["equipment"][number]): string {
  return `${kind} ${code}, ${certificate}, due ${calibratedUntil}`;
}
