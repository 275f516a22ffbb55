import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { HexGrid } from "@/app/_components/hex-grid";
import { formatAddress } from "@/lib/domain/format/digest";
import { formatDecoded } from "@/lib/domain/format/field-value";
import { COEFFICIENT_QUANTITIES, formatQuantity, quantities } from "@/lib/domain/format/quantity";
import type { DeviceOrigin } from "@/lib/services/trace/get-device-origin";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";
import { measuredSentence } from "./measured-sentence";

export interface ValuesCardProps {
  origin: DeviceOrigin;
  /** How its coefficients were derived; null where they were not, as for imported ones of another program. */
  derived: DerivedDeviceDetail | null;
}

/** The coefficients as the memory holds them, decoded, and how the device was measured for them. */
export function ValuesCard({ origin, derived }: ValuesCardProps) {
  const { fields } = origin.image;
  const facts = COEFFICIENT_QUANTITIES.flatMap((name) => {
    const field = fields.find(({ source }) => source === `coefficients.${name}`);
    if (!field || typeof field.value !== "number") return [];
    const { unit } = quantities[name];
    return [{ label: unit === "1" ? name : `${name}, ${unit}`, value: formatQuantity(name, field.value) }];
  });
  return (
    <Card
      title={origin.basis === "carried" ? "Decoded from what was written" : "Decoded from the live release"}
      note={origin.basis === "carried" ? undefined : "not from the device"}
    >
      <Facts small facts={facts} />
      <p className="mt-3 text-sm text-ink-soft">{measuredSentence(origin, derived)}</p>
      <details className="mt-3 text-sm print:hidden">
        <summary className="w-max text-slate hover:text-copper-strong">All fields and bytes</summary>
        <div className="mt-3 overflow-x-auto">
          <table className="w-full text-sm">
            <thead>
              <tr className="text-left text-xs text-ink-soft">
                <th scope="col" className="py-1 pr-4 font-semibold">
                  Field
                </th>
                <th scope="col" className="py-1 pr-4 font-semibold">
                  At
                </th>
                <th scope="col" className="py-1 pr-4 text-right font-semibold">
                  Value
                </th>
                <th scope="col" className="py-1 pr-4 font-semibold">
                  Unit
                </th>
                <th scope="col" className="py-1 font-semibold">
                  Bytes
                </th>
              </tr>
            </thead>
            <tbody>
              {fields.map((field) => {
                const shown = formatDecoded(field);
                return (
                  <tr key={`${field.name}${field.at}`} className="border-t border-rule/55">
                    <th scope="row" className="py-1 pr-4 text-left font-normal">
                      {field.name}
                    </th>
                    <td className="py-1 pr-4 font-mono text-ink-soft">{formatAddress(field.at)}</td>
                    <td className="py-1 pr-4 text-right font-mono">{shown.text}</td>
                    <td className="py-1 pr-4 whitespace-nowrap text-ink-soft">{shown.unit}</td>
                    <td className="py-1 font-mono text-xs wrap-anywhere">{field.raw.toUpperCase()}</td>
                  </tr>
                );
              })}
            </tbody>
          </table>
        </div>
        <div className="mt-4">
          <HexGrid
            hex={origin.image.hex}
            fields={fields.map(({ name, at, raw }) => ({ name, at, length: raw.length / 2 }))}
            kept={origin.image.kept}
            fill={origin.image.fill}
            onlyUsed
            label="Bytes of the image"
          />
        </div>
      </details>
    </Card>
  );
}
