import Link from "next/link";
import { Facts } from "@/app/_components/facts";
import { DataTable } from "@/app/_components/table/data-table";
import { formatField, formatFieldChange } from "@/lib/domain/format/field-value";
import { formatCount, formatFigure, formatPercent } from "@/lib/domain/format/figure";
import { type Named, NamedSerials } from "./named-serials";

interface OutlierField {
  name: string;
  unit: string | null;
  median: number | null;
  deviation: number | null;
  largestScore: number | null;
  serial: string | null;
}

export interface OutlierEvidence {
  threshold: number;
  fields: OutlierField[];
  outliers: {
    count: number;
    items: { serial: string; field: string; unit: string | null; value: number; score: number }[];
  };
}

interface MovedField {
  name: string;
  unit: string | null;
  devices: number;
  largest: { serial: string; from: number; to: number; steps: number | null } | null;
  shareOfRoom: number | null;
  signFlips: Named;
  signMatters: boolean;
}

export interface LiveDifferenceEvidence {
  live: { id: string; version: string } | null;
  thresholds: { differenceShareWarn: number; differenceStepWarn: number; signFlipsWarn: number };
  both?: number;
  values?: number;
  versionOnly?: number;
  added?: number;
  removed?: number;
  share?: number;
  fields?: MovedField[];
}

const shown = (value: number | null, unit: string | null) => (value === null ? "—" : formatField(value, unit).text);
const score = (value: number | null) => (value === null ? "no spread" : formatFigure(value, { digits: 1 }));

/** How far every field's farthest value lies from the lot's median. */
export function Outliers({ threshold, fields, outliers }: OutlierEvidence) {
  const rows = fields.map(({ name, unit, median, deviation, largestScore, serial }) => ({
    name,
    unit: formatField(median, unit).unit,
    median: shown(median, unit),
    deviation: shown(deviation, unit),
    score: score(largestScore),
    serial: serial ?? "—",
  }));
  const found = outliers.items.map((one) => ({ ...one, value: shown(one.value, one.unit), score: score(one.score) }));
  return (
    <div className="flex flex-col gap-3">
      {found.length > 0 ? (
        <DataTable
          name="values that stand out"
          urlName="outliers"
          rows={found}
          rowHref="/trace/{serial}"
          columns={[
            { key: "serial", header: "Serial", format: { as: "code" } },
            { key: "field", header: "Field", format: { as: "code" } },
            { key: "value", header: "Value", align: "right", format: { as: "code" } },
            { key: "score", header: "Robust deviations", align: "right", format: { as: "code" } },
          ]}
          empty={{ title: "No value stands out" }}
        />
      ) : null}
      <DataTable
        name="spread"
        urlName="spread"
        rows={rows}
        note={`Robust deviation: 1.4826 times the median distance from the median. Warns above ${threshold}`}
        columns={[
          { key: "name", header: "Field", format: { as: "code" } },
          { key: "unit", header: "Unit" },
          { key: "median", header: "Median", align: "right", format: { as: "code" } },
          { key: "deviation", header: "Robust deviation", align: "right", format: { as: "code" } },
          { key: "score", header: "Farthest", align: "right", format: { as: "code" } },
          { key: "serial", header: "of", format: { as: "code" } },
        ]}
        empty={{ title: "No coefficients" }}
      />
    </div>
  );
}

/** What the package changes in devices that hold the live release. */
export function LiveDifference(evidence: LiveDifferenceEvidence) {
  const { live, thresholds, fields = [] } = evidence;
  if (!live) return <p className="text-sm text-ink-soft">No release of this lot was live when it was built.</p>;
  const rows = fields.map(({ name, unit, devices, largest, shareOfRoom, signFlips }) => {
    const change = largest && formatFieldChange({ ...largest, unit });
    return {
      name,
      devices: formatCount(devices),
      step: change?.step ?? change?.lsb ?? "—",
      serial: largest?.serial ?? "—",
      room: shareOfRoom === null ? "no limits" : formatPercent(shareOfRoom, 2),
      flips: formatCount(signFlips.count),
    };
  });
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "live then", value: <Link href={`/packages/${live.id}`}>{live.version}</Link> },
          { label: `of ${formatCount(evidence.both)} change values`, value: formatCount(evidence.values) },
          { label: "share of devices", value: formatPercent(evidence.share, 1) },
          { label: "version numbers only", value: formatCount(evidence.versionOnly) },
          { label: "added, gone", value: `${formatCount(evidence.added)}, ${formatCount(evidence.removed)}` },
        ]}
      />
      <DataTable
        name="changed fields"
        urlName="moved"
        rows={rows}
        note={`Warns above ${formatPercent(thresholds.differenceShareWarn)} of the devices, ${formatPercent(thresholds.differenceStepWarn, 1)} of the room between limits, ${formatCount(thresholds.signFlipsWarn)} changed signs`}
        columns={[
          { key: "name", header: "Field", format: { as: "code" } },
          { key: "devices", header: "Devices", align: "right", format: { as: "code" } },
          { key: "step", header: "Largest step", align: "right", format: { as: "code" } },
          { key: "serial", header: "of", format: { as: "code" } },
          { key: "room", header: "of its room", align: "right", format: { as: "code" } },
          { key: "flips", header: "Sign changes", align: "right", format: { as: "code" } },
        ]}
        empty={{ title: "No value changes" }}
      />
      {fields
        .filter((field) => field.signMatters)
        .map((field) => (
          <NamedSerials key={field.name} words={`devices change the sign of ${field.name}`} {...field.signFlips} />
        ))}
    </div>
  );
}
