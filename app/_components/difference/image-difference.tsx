"use client";

import { DiffValue } from "@/app/_components/diff-value";
import type { ChangedDevice } from "@/app/_components/difference/changed-device";
import { type HexField, HexGrid } from "@/app/_components/hex-grid";
import { formatFieldChange } from "@/lib/domain/format/field-value";
import { formatNumberOf } from "@/lib/domain/format/figure";

export interface ImageDifferenceProps {
  item: ChangedDevice;
  /** The newer image, or the older one where the serial is removed, as hex. */
  hex: string;
  /** Fields and checksums of that image's layout. */
  fields: readonly { name: string; at: number; length: number }[];
  fill?: number;
  kept?: readonly (readonly [number, number])[];
}

/** What differs for one serial: fields in engineering units, and the bytes with the changed ones underlined. */
export function ImageDifference({ item, hex, fields, fill, kept }: ImageDifferenceProps) {
  const changes = new Map(item.fields.map((field) => [field.name, field]));
  const whole = item.change === "added" || item.change === "removed";
  const shown = fields.map((field): HexField => {
    const change = changes.get(field.name);
    const lsb = change && formatFieldChange(change).lsb;
    return { ...field, note: lsb ? `${lsb} steps` : undefined };
  });
  return (
    <div className="flex flex-col gap-3">
      {whole ? (
        <p className="text-sm text-ink-soft">
          {item.change === "added"
            ? "The other package has no image of this serial: all of its bytes are new."
            : "The newer package has no image of this serial; these are the bytes of the older one."}
        </p>
      ) : (
        <ul className="flex flex-wrap gap-x-6 gap-y-1 text-sm">
          {item.fields.map((field) => (
            <li key={field.name}>
              <span className="font-semibold">{field.name}</span> <DiffValue {...formatFieldChange(field)} />
            </li>
          ))}
        </ul>
      )}
      <HexGrid
        hex={hex}
        fields={shown}
        fill={fill}
        kept={kept}
        changed={whole ? [] : item.bytes.map(({ at }) => at)}
        onlyUsed
        label={`Bytes of ${item.serial}`}
      />
      {whole ? null : (
        <p className="text-sm text-ink-soft">
          {formatNumberOf(item.bytes.length, "byte differs", "bytes differ")}, underlined. Rows without a value are left
          out.
        </p>
      )}
    </div>
  );
}
