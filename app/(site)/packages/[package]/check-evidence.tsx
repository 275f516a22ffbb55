import Link from "next/link";
import type { ReactNode } from "react";
import { Facts } from "@/app/_components/facts";
import { DataTable } from "@/app/_components/table/data-table";
import { formatField, formatFieldChange } from "@/lib/domain/format/field-value";
import { formatCount, formatFigure } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";
import { leftOutWords } from "../left-out-words";
import {
  DecidedSets,
  type DecidedSetsEvidence,
  EqualImages,
  type EqualImagesEvidence,
  Firmware,
  type FirmwareEvidence,
  HexReading,
  type HexReadingEvidence,
  Repeatability,
  type RepeatabilityEvidence,
  ReservedBytes,
  type ReservedEvidence,
} from "./byte-evidence";
import { Evidence } from "./evidence";
import { LiveDifference, type LiveDifferenceEvidence, type OutlierEvidence, Outliers } from "./lot-evidence";
import { type Named, NamedSerials } from "./named-serials";
import {
  PredictionEvidence,
  type TwinEvidence,
  VerificationEvidence,
  type VerificationFacts,
} from "./prediction-evidence";

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

interface ProvenRangeEvidence {
  family: [number, number];
  provenRange: [number, number] | null;
  gaps: [number, number][];
  unprovenDevices: number;
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
      return <VerificationEvidence {...(evidence as VerificationFacts)} />;
    case "twin":
      return <PredictionEvidence {...(evidence as TwinEvidence)} />;
    case "hex-reading":
      return <HexReading {...(evidence as HexReadingEvidence)} />;
    case "decided-sets":
      return <DecidedSets {...(evidence as DecidedSetsEvidence)} />;
    case "firmware":
      return <Firmware {...(evidence as FirmwareEvidence)} />;
    case "reserved-bytes":
      return <ReservedBytes {...(evidence as ReservedEvidence)} />;
    case "equal-images":
      return <EqualImages {...(evidence as EqualImagesEvidence)} />;
    case "repeatability":
      return <Repeatability {...(evidence as RepeatabilityEvidence)} />;
    case "outliers":
      return <Outliers {...(evidence as OutlierEvidence)} />;
    case "live-difference":
      return <LiveDifference {...(evidence as LiveDifferenceEvidence)} />;
    case "proven-range":
      return <ProvenRange {...(evidence as ProvenRangeEvidence)} />;
    default:
      return <Evidence value={evidence} />;
  }
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
        <NamedSerials key={reason} words={`left out: ${leftOutWords[reason] ?? reason}`} {...named} />
      ))}
      <NamedSerials words="packed while newer coefficients wait for a decision" {...newerUndecided} />
      <NamedSerials words="with another board than the one that was measured" {...otherBoard} />
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

/** A difference without its sign, with as many decimals as it takes to see it. */
function sizeText(difference: number, unit: string | null): string {
  const { step } = formatFieldChange({ from: 0, to: Math.abs(difference), unit, steps: null });
  return step?.replace("+", "") ?? formatField(Math.abs(difference), unit).text;
}

function RoundTrip({ devices, values, checksums, faults, largestErrors }: RoundTripEvidence) {
  const rows = largestErrors.map(({ field, unit, error, serial }) => ({
    field,
    serial,
    error: sizeText(error, unit),
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
          note="What was read back against what was put in"
          columns={[
            { key: "field", header: "Field", format: { as: "code" } },
            { key: "error", header: "Largest difference", align: "right", format: { as: "code" } },
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

const rangeText = (range: readonly [number, number]) =>
  range.map((end) => formatFigure(end, { digits: 2 })).join(" to ");

function ProvenRange({ family, provenRange, gaps, unprovenDevices }: ProvenRangeEvidence) {
  return (
    <Facts
      small
      facts={[
        { label: "the family works at, °C", value: rangeText(family) },
        { label: "proven, °C", value: provenRange ? rangeText(provenRange) : "nothing" },
        ...(gaps.length > 0 ? [{ label: "nothing is claimed at, °C", value: gaps.map(rangeText).join(", ") }] : []),
        ...(unprovenDevices > 0 ? [{ label: "devices on imported values", value: formatCount(unprovenDevices) }] : []),
      ]}
    />
  );
}
