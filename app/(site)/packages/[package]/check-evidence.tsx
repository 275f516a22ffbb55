import Link from "next/link";
import type { ReactNode } from "react";
import { Facts } from "@/app/_components/facts";
import { LegalNote } from "@/app/_components/legal-note";
import { DataTable } from "@/app/_components/table/data-table";
import { formatField } from "@/lib/domain/format/field-value";
import { formatCount, formatNumberOf, formatPercent } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";
import { leftOutWords } from "../left-out-words";
import { Evidence } from "./evidence";

/** Serials of a finding: their number is whole, the list may be cut. */
interface Named {
  count: number;
  serials: string[];
}

interface CoverageEvidence {
  lotDevices: number;
  packed: number;
  leftOut: (Named & { reason: string })[];
  newerUndecided: Named;
  otherBoard: Named;
}

interface LimitsEvidence {
  fields: {
    name: string;
    unit: string | null;
    min: number | null;
    max: number | null;
    lowest: { value: number; serial: string };
    highest: { value: number; serial: string };
  }[];
}

interface RoundTripEvidence {
  devices: number;
  values: number;
  checksums: number;
  faults: { count: number; items: Record<string, unknown>[] };
  largestErrors: { field: string; unit: string | null; error: number; serial: string }[];
}

interface PoolingEvidence {
  derivations: {
    derivation: string;
    gainTc: number;
    sd: number | null;
    n: number;
    toleranceInterval: [number, number] | null;
    limit: number;
    verdict: string;
  }[];
}

interface VerificationEvidence {
  confidence: number;
  derivations: {
    derivation: string;
    judged: number;
    passed: number;
    shareShown: number | null;
    devices: Record<string, unknown>[];
  }[];
}

interface TwinEvidence {
  judged: number;
  spanJudged: number;
  zeroJudged: number;
  neverLoaded: Named;
  outside: Named;
  worst: Record<string, unknown>[];
}

/** What a check saw, drawn for each kind; a check that is not known here shows its facts as they are. */
export function CheckEvidence({ code, evidence }: { code: string; evidence: unknown }): ReactNode {
  switch (code) {
    case "coverage":
      return <Coverage {...(evidence as CoverageEvidence)} />;
    case "limits":
      return <Limits {...(evidence as LimitsEvidence)} />;
    case "round-trip":
      return <RoundTrip {...(evidence as RoundTripEvidence)} />;
    case "pooling":
      return <Pooling {...(evidence as PoolingEvidence)} />;
    case "verification":
      return <Verification {...(evidence as VerificationEvidence)} />;
    case "twin":
      return <Twin {...(evidence as TwinEvidence)} />;
    default:
      return <Evidence value={evidence} />;
  }
}

function Serials({ words, count, serials }: Named & { words: string }) {
  if (count === 0) return null;
  return (
    <div className="text-sm">
      <p className="font-semibold">
        {formatCount(count)} {words}
      </p>
      <p className="flex flex-wrap gap-x-3 gap-y-0.5">
        {serials.map((serial) => (
          <Link key={serial} href={`/trace/${encodeURIComponent(serial)}`} prefetch={false} className="font-mono">
            {serial}
          </Link>
        ))}
        {count > serials.length ? (
          <span className="text-ink-soft">and {formatCount(count - serials.length)} more</span>
        ) : null}
      </p>
    </div>
  );
}

function Coverage({ lotDevices, packed, leftOut, newerUndecided, otherBoard }: CoverageEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "devices of the lot", value: formatCount(lotDevices) },
          { label: "packed", value: formatCount(packed) },
          { label: "left out", value: formatCount(lotDevices - packed) },
        ]}
      />
      {leftOut.map(({ reason, ...named }) => (
        <Serials key={reason} words={`left out: ${leftOutWords[reason] ?? reason}`} {...named} />
      ))}
      <Serials words="packed while newer coefficients wait for a decision" {...newerUndecided} />
      <Serials words="with another board than the one that was measured" {...otherBoard} />
    </div>
  );
}

const value = (amount: number | null, unit: string | null) => (amount === null ? "—" : formatField(amount, unit).text);

function Limits({ fields }: LimitsEvidence) {
  const rows = fields.map((field) => ({
    name: field.name,
    unit: formatField(field.lowest.value, field.unit).unit,
    limits: `${value(field.min, field.unit)} to ${value(field.max, field.unit)}`,
    lowest: value(field.lowest.value, field.unit),
    lowestSerial: field.lowest.serial,
    highest: value(field.highest.value, field.unit),
    highestSerial: field.highest.serial,
  }));
  return (
    <DataTable
      name="limits"
      urlName="limits"
      rows={rows}
      columns={[
        { key: "name", header: "Field", format: { as: "code" } },
        { key: "unit", header: "Unit" },
        { key: "limits", header: "Limits", align: "right", format: { as: "code" } },
        { key: "lowest", header: "Lowest", align: "right", format: { as: "code" } },
        { key: "lowestSerial", header: "of", format: { as: "code" } },
        { key: "highest", header: "Highest", align: "right", format: { as: "code" } },
        { key: "highestSerial", header: "of", format: { as: "code" } },
      ]}
      empty={{ title: "No limits", text: "The layout names none." }}
    />
  );
}

function RoundTrip({ devices, values, checksums, faults, largestErrors }: RoundTripEvidence) {
  const rows = largestErrors.map(({ field, unit, error, serial }) => ({
    field,
    serial,
    error: formatField(error, unit, 6).text,
    unit: formatField(error, unit).unit,
  }));
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "devices", value: formatCount(devices) },
          { label: "values", value: formatCount(values) },
          { label: "checksums", value: formatCount(checksums) },
        ]}
      />
      {faults.count > 0 ? <Evidence value={{ faults: faults.items }} /> : null}
      {rows.length > 0 ? (
        <DataTable
          name="rounding"
          urlName="rounding"
          rows={rows}
          note="Largest rounding of each field"
          columns={[
            { key: "field", header: "Field", format: { as: "code" } },
            { key: "error", header: "Read back less put in", align: "right", format: { as: "code" } },
            { key: "unit", header: "Unit" },
            { key: "serial", header: "Serial", format: { as: "code" } },
          ]}
          empty={{ title: "No numbers" }}
        />
      ) : null}
    </div>
  );
}

function Pooling({ derivations }: PoolingEvidence) {
  if (derivations.length === 0) return <p className="text-sm text-ink-soft">No derivation pools.</p>;
  return derivations.map((one) => (
    <div key={one.derivation} className="flex flex-col gap-1.5">
      <Facts
        small
        facts={[
          { label: `gainTc, mean of ${one.n}, ppm/K`, value: formatQuantity("gainTc", one.gainTc) },
          { label: "standard deviation, ppm/K", value: formatQuantity("gainTc", one.sd) },
          {
            label: "tolerance interval, ppm/K",
            value: one.toleranceInterval
              ? one.toleranceInterval.map((end) => formatQuantity("gainTc", end)).join(" to ")
              : "—",
          },
          { label: "limit, ppm/K", value: `±${formatQuantity("gainTc", one.limit)}` },
        ]}
      />
      <p className="text-sm">
        <Link href={`/derivations/${one.derivation}`}>The derivation with its charts</Link>
      </p>
    </div>
  ));
}

function Verification({ confidence, derivations }: VerificationEvidence) {
  return derivations.map((one) => (
    <div key={one.derivation} className="flex flex-col gap-2">
      <p className="text-sm">
        {one.passed} of {formatNumberOf(one.judged, "device")} passed
        {one.shareShown === null
          ? ""
          : `: by itself that shows, with ${formatPercent(confidence)} confidence, that at least ${formatPercent(Math.floor(one.shareShown * 100) / 100)} of the lot would`}
        . <Link href={`/derivations/${one.derivation}`}>The derivation</Link>
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

function Twin({ judged, spanJudged, zeroJudged, neverLoaded, outside, worst }: TwinEvidence) {
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
      <Serials words="predicted outside the envelope" {...outside} />
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
