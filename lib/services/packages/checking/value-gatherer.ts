import type { CompiledField, CompiledLayout } from "@/builders/codec/compile-layout";
import { listRoundTripFaults, storageTolerance } from "@/builders/codec/round-trip";
import { EVIDENCE_MAX, type PackageCheck } from "@/lib/domain/package-checks/check";
import { checkLimits, type FieldExtremes } from "@/lib/domain/package-checks/limits";
import { checkOutliers, type FieldValues } from "@/lib/domain/package-checks/outliers";
import { checkRoundTrip, type RoundTripFault } from "@/lib/domain/package-checks/round-trip";
import type { ComposedImage } from "../compose-package";

interface Extreme {
  value: number;
  serial: string;
}

interface FieldRecord {
  field: CompiledField;
  lowest: Extreme | null;
  highest: Extreme | null;
  largestError: { error: number; serial: string } | null;
  /** Of every device in turn, where the field holds a coefficient. */
  values: Float64Array | null;
}

/** Gathers what images hold, decoded: against what was put in, against the layout's limits, against the other devices. */
export class ValueGatherer {
  readonly #layout: CompiledLayout;
  readonly #fields: FieldRecord[];
  readonly #serials: string[] = [];
  readonly #faults: RoundTripFault[] = [];
  #faultCount = 0;

  /** @param devices how many will be added. */
  constructor(layout: CompiledLayout, devices: number) {
    this.#layout = layout;
    this.#fields = layout.fields.map((field) => ({
      field,
      lowest: null,
      highest: null,
      largestError: null,
      values: field.source?.startsWith("coefficients.") ? new Float64Array(devices).fill(Number.NaN) : null,
    }));
  }

  add({ device: { serial }, sources, bytes, decoded }: ComposedImage): void {
    for (const fault of listRoundTripFaults(this.#layout, sources, bytes, decoded)) {
      this.#faultCount++;
      if (this.#faults.length < EVIDENCE_MAX) this.#faults.push({ serial, ...fault });
    }
    const index = this.#serials.push(serial) - 1;
    this.#fields.forEach((record, i) => {
      const value = decoded[i]?.value;
      if (typeof value !== "number") return;
      if (record.values) record.values[index] = value;
      if (!record.lowest || value < record.lowest.value) record.lowest = { value, serial };
      if (!record.highest || value > record.highest.value) record.highest = { value, serial };
      const error = Math.abs(value - (record.field.read(sources) as number));
      if (!record.largestError || error > record.largestError.error) record.largestError = { error, serial };
    });
  }

  limits(): PackageCheck {
    return checkLimits(this.#serials.length, this.#extremes());
  }

  roundTrip(): PackageCheck {
    const devices = this.#serials.length;
    return checkRoundTrip({
      devices,
      values: devices * this.#fields.length,
      checksums: devices * this.#layout.checksums.length,
      faults: this.#faults,
      faultCount: this.#faultCount,
      largestErrors: this.#fields.flatMap(({ field, largestError }) =>
        largestError ? [{ field: field.name, unit: field.unit, ...largestError }] : [],
      ),
    });
  }

  outliers(threshold: number): PackageCheck {
    const fields = this.#fields.flatMap(({ field, values }): FieldValues[] =>
      values ? [{ name: field.name, unit: field.unit, values }] : [],
    );
    return checkOutliers({ serials: this.#serials, fields, threshold });
  }

  #extremes(): FieldExtremes[] {
    const finite = (limit: number) => (Number.isFinite(limit) ? limit : null);
    return this.#fields.flatMap(({ field, lowest, highest }) => {
      if (!lowest || !highest) return [];
      const tolerance = storageTolerance(field, Math.max(Math.abs(lowest.value), Math.abs(highest.value)));
      const { name, unit } = field;
      return [{ name, unit, min: finite(field.min), max: finite(field.max), tolerance, lowest, highest }];
    });
  }
}
