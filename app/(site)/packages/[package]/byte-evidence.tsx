import { Digest } from "@/app/_components/digest";
import { Facts } from "@/app/_components/facts";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import { leftOutWords } from "../left-out-words";
import { Evidence } from "./evidence";
import { type Named, NamedSerials } from "./named-serials";

interface Faults {
  count: number;
  items: Record<string, unknown>[];
}

export interface HexReadingEvidence {
  devices: number;
  /** Packages of before name one. */
  reader?: string;
  readers?: string[];
  faults: Faults;
}

export interface ReservedEvidence {
  devices: number;
  bytes: number;
  fill: number;
  ranges: { from: number; to: number }[];
  faults: Faults;
}

export interface EqualImagesEvidence {
  devices: number;
  groups: { count: number; items: string[][] };
}

export interface RepeatabilityEvidence {
  devices: number;
  digest: string;
  repeated: string;
  differing: Named;
}

export interface FirmwareEvidence {
  firmware: string;
  range: string;
  others: number;
  outside: Faults;
}

export interface DecidedSetsEvidence {
  devices: number;
  notApproved: Named;
  newerUndecided: Named;
  leftOut: (Named & { reason: string })[];
}

/** What every HEX file was read with. */
export function HexReading({ devices, reader, readers, faults }: HexReadingEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "HEX files", value: formatCount(devices) },
          { label: "readers", value: (readers ?? [reader ?? ""]).join(", ") },
          { label: "read otherwise", value: formatCount(faults.count) },
        ]}
      />
      {faults.count > 0 ? <Evidence value={{ faults: faults.items }} /> : null}
    </div>
  );
}

const offset = (at: number) => at.toString(16).toUpperCase().padStart(3, "0");

/** Bytes that no field claims. */
export function ReservedBytes({ devices, bytes, fill, ranges, faults }: ReservedEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "images", value: formatCount(devices) },
          { label: "bytes of no field", value: formatCount(bytes) },
          { label: "fill, hex", value: fill.toString(16).toUpperCase().padStart(2, "0") },
          { label: "not at the fill", value: formatCount(faults.count) },
        ]}
      />
      {ranges.length > 0 ? (
        <p className="text-sm">
          <span className="text-ink-soft">Offsets, hex: </span>
          <span className="font-mono">
            {ranges.map(({ from, to }) => (from === to ? offset(from) : `${offset(from)}–${offset(to)}`)).join("  ")}
          </span>
        </p>
      ) : null}
      {faults.count > 0 ? <Evidence value={{ faults: faults.items }} /> : null}
    </div>
  );
}

/** Devices that hold the same values. */
export function EqualImages({ devices, groups }: EqualImagesEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "images compared", value: formatCount(devices) },
          { label: "groups of equal ones", value: formatCount(groups.count) },
        ]}
      />
      {groups.items.map((serials) => (
        <NamedSerials key={serials[0]} words="devices hold the same values" count={serials.length} serials={serials} />
      ))}
      {groups.count > groups.items.length ? (
        <p className="text-sm text-ink-soft">
          and {formatNumberOf(groups.count - groups.items.length, "more group", "more groups")}
        </p>
      ) : null}
    </div>
  );
}

/** Both times that the package was composed. */
export function Repeatability({ devices, digest, repeated, differing }: RepeatabilityEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "images, twice", value: formatCount(devices) },
          { label: "package digest", value: <Digest value={digest} short /> },
          { label: "composed again", value: <Digest value={repeated} short /> },
        ]}
      />
      <NamedSerials words="images came out otherwise" {...differing} />
    </div>
  );
}

/** Whose firmware understands the layout. */
export function Firmware({ firmware, range, others, outside }: FirmwareEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "firmware of the lot", value: firmware },
          { label: "the layout is for", value: range },
          { label: "devices known with another", value: formatCount(others) },
        ]}
      />
      {outside.count > 0 ? <Evidence value={{ "outside the range": outside.items }} /> : null}
    </div>
  );
}

/** What was decided about the coefficients that are packed, and about those that are not. */
export function DecidedSets({ devices, notApproved, newerUndecided, leftOut }: DecidedSetsEvidence) {
  return (
    <div className="flex flex-col gap-3">
      <Facts
        small
        facts={[
          { label: "packed", value: formatCount(devices) },
          { label: "not approved", value: formatCount(notApproved.count) },
          { label: "with newer ones undecided", value: formatCount(newerUndecided.count) },
        ]}
      />
      <NamedSerials words="packed and not approved" {...notApproved} />
      <NamedSerials words="packed while newer coefficients wait for a decision" {...newerUndecided} />
      {leftOut.map(({ reason, ...named }) => (
        <NamedSerials key={reason} words={`left out: ${leftOutWords[reason] ?? reason}`} {...named} />
      ))}
    </div>
  );
}
