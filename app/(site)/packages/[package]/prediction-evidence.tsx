import Link from "next/link";
import { Facts } from "@/app/_components/facts";
import { LegalNote } from "@/app/_components/legal-note";
import { DataTable } from "@/app/_components/table/data-table";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import { type Named, NamedSerials } from "./named-serials";

export interface VerificationFacts {
  derivations: {
    derivation: string;
    judged: number;
    passed: number;
    devices: Record<string, unknown>[];
  }[];
}

export interface TwinEvidence {
  judged: number;
  spanJudged: number;
  zeroJudged: number;
  neverLoaded: Named;
  outside: Named;
  worst: Record<string, unknown>[];
}

/** Verification devices of each derivation. */
export function VerificationEvidence({ derivations }: VerificationFacts) {
  return derivations.map((one) => (
    <div key={one.derivation} className="flex flex-col gap-2">
      <p className="text-sm">
        {one.passed} of {formatNumberOf(one.judged, "device")} passed.{" "}
        <Link href={`/derivations/${one.derivation}`}>The derivation</Link>
      </p>
      {one.devices.length > 0 ? (
        <DataTable
          name="verification devices"
          urlName={`verification${one.derivation.slice(-4)}`}
          rows={one.devices}
          columns={[
            { key: "serial", header: "Serial", format: { as: "code" } },
            ...errorColumns,
            { key: "passed", header: "Verdict", format: { as: "yes-no", yes: "inside", no: "outside" } },
          ]}
          empty={{ title: "No verification device" }}
        />
      ) : null}
    </div>
  ));
}

const errorColumns = [
  { key: "spanErrorPpm", header: "span error", format: { as: "quantity", name: "spanErrorPpm", sign: "always" } },
  {
    key: "spanRatio",
    header: "span",
    title: "Share of the envelope; up to 1 is inside",
    format: { as: "quantity", name: "ratio" },
  },
  {
    key: "zeroShiftRatio",
    header: "zero shift",
    title: "Share of the limit; up to 1 is inside",
    format: { as: "quantity", name: "ratio" },
  },
] as const;

/** The decoded values applied to the lot's own readings, device by device. */
export function PredictionEvidence({ judged, spanJudged, zeroJudged, neverLoaded, outside, worst }: TwinEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "devices with readings", value: formatCount(judged) },
          { label: "judged on span", value: formatCount(spanJudged) },
          { label: "judged on zero", value: formatCount(zeroJudged) },
          { label: "never loaded", value: formatCount(neverLoaded.count) },
        ]}
      />
      <NamedSerials words="predicted outside the envelope" {...outside} />
      <DataTable
        name="predictions"
        urlName="twin"
        rows={worst}
        rowHref="/trace/{serial}"
        note="The decoded values applied to the lot's own readings, worst first"
        columns={[
          { key: "serial", header: "Serial", format: { as: "code" } },
          ...errorColumns,
          {
            key: "independent",
            header: "Span judged",
            title: "On a loaded point that the gain was not taken from",
            format: { as: "yes-no", yes: "yes", no: "at its trim point only" },
          },
        ]}
        empty={{ title: "No readings of packed devices" }}
      />
      <LegalNote />
    </div>
  );
}
