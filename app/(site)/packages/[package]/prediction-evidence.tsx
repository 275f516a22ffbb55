import Link from "next/link";
import { Facts } from "@/app/_components/facts";
import { LegalNote } from "@/app/_components/legal-note";
import { DataTable } from "@/app/_components/table/data-table";
import { formatCount, formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { type Named, NamedSerials } from "./named-serials";

export interface VerificationFacts {
  derivations: {
    derivation: string;
    judged: number;
    passed: number;
    devices: Record<string, unknown>[];
  }[];
}

interface AtDevice {
  serial: string;
  atC: number;
}

/** Packages of before say nothing of temperatures, rounding and the family's range. */
export interface TwinEvidence {
  span?: { serial: string; spanRatio: number; spanAtC: number | null; spanRoundingPpm: number | null } | null;
  zero?: { serial: string; zeroShiftRatio: number; zeroBetweenC: [number, number] | null } | null;
  rounding?: { serial: string; ppm: number } | null;
  range?: {
    overflows: (AtDevice & { quantity: string })[];
    overflowCount: number;
    spanRounding: (AtDevice & { ppm: number }) | null;
    zeroRounding: (AtDevice & { mvV: number }) | null;
  };
  withoutReadings: number;
  devices: number;
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
export function PredictionEvidence(evidence: TwinEvidence) {
  const { devices, spanJudged, zeroJudged, neverLoaded, withoutReadings, outside, worst } = evidence;
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "devices with readings", value: formatCount(devices - withoutReadings) },
          { label: "judged on span", value: formatCount(spanJudged) },
          { label: "judged on zero", value: formatCount(zeroJudged) },
          { label: "never loaded", value: formatCount(neverLoaded.count) },
          { label: "without readings", value: formatCount(withoutReadings) },
        ]}
      />
      <WorstCases {...evidence} />
      <NamedSerials words="predicted outside the envelope" {...outside} />
      <DataTable
        name="predictions"
        urlName="twin"
        rows={worst.map((one) => ({ ...one, spanJudged: spanWords(one) }))}
        rowHref="/trace/{serial}"
        note="The decoded values applied to the lot's own readings, worst first"
        columns={[
          { key: "serial", header: "Serial", format: { as: "code" } },
          ...errorColumns,
          {
            key: "spanRoundingPpm",
            header: "of it rounding",
            title: "Less what the coefficients before they were stored would give at the same reading, ppm",
            format: { as: "quantity", name: "spanErrorPpm", sign: "always" },
          },
          {
            key: "spanJudged",
            header: "Span judged",
            title: "On a loaded point that the gain was not taken from",
          },
        ]}
        empty={{ title: "No readings of packed devices" }}
      />
      <LegalNote />
    </div>
  );
}

/** Whether a device's readings say something about its span. */
function spanWords({ spanRatio, independent }: Record<string, unknown>): string {
  if (spanRatio === null) return "no, never loaded";
  return independent === true ? "yes" : "no, loaded at its trim point only";
}

const celsius = (value: number | null | undefined) => `${formatFigure(value, { digits: 1 })} °C`;

/** The worst device and temperature, what rounding has to do with it, and what is known beyond the readings. */
function WorstCases({ span, zero, rounding, range }: TwinEvidence) {
  const { overflowCount = 0, spanRounding = null, zeroRounding = null } = range ?? {};
  const rows = [
    span && {
      what: "Largest span error",
      value: `${formatFigure(span.spanRatio)} of the limit, ${formatFigure(span.spanRoundingPpm, { digits: 2, sign: "always" })} ppm of it rounding`,
      where: celsius(span.spanAtC),
      serial: span.serial,
    },
    zero && {
      what: "Largest zero shift",
      value: `${formatFigure(zero.zeroShiftRatio)} of the limit`,
      where: zero.zeroBetweenC ? zero.zeroBetweenC.map(celsius).join(" to ") : "—",
      serial: zero.serial,
    },
    rounding && {
      what: "Largest rounding at a reading",
      value: `${formatFigure(rounding.ppm, { digits: 2 })} ppm`,
      where: "—",
      serial: rounding.serial,
    },
    spanRounding && {
      what: "Largest rounding of the span over the family's range",
      value: `${formatFigure(spanRounding.ppm, { digits: 2 })} ppm`,
      where: celsius(spanRounding.atC),
      serial: spanRounding.serial,
    },
    zeroRounding && {
      what: "Largest rounding of zero over the family's range",
      value: `${formatFigure(zeroRounding.mvV * 1e6, { digits: 2 })} nV/V`,
      where: celsius(zeroRounding.atC),
      serial: zeroRounding.serial,
    },
  ].filter((row) => row !== null && row !== undefined);
  if (rows.length === 0) return null;
  return (
    <>
      <DataTable
        name="worst cases"
        urlName="twinworst"
        rows={rows}
        rowHref="/trace/{serial}"
        columns={[
          { key: "what", header: "What" },
          { key: "value", header: "Value", align: "right", format: { as: "code" } },
          { key: "where", header: "At", align: "right", format: { as: "code" } },
          { key: "serial", header: "Serial", format: { as: "code" } },
        ]}
        empty={{ title: "Nothing to judge" }}
      />
      {overflowCount > 0 ? (
        <p className="text-sm">
          {formatCount(overflowCount)} devices overflow over the family's temperatures:{" "}
          {range?.overflows.map((one) => `${one.serial}, ${one.quantity} at ${celsius(one.atC)}`).join("; ")}
        </p>
      ) : null}
    </>
  );
}
