import { findReadDifference } from "@/builders/bundle/independent-read";
import type { CompiledField } from "@/builders/codec/compile-layout";
import { listRoundTripFaults, storageTolerance } from "@/builders/codec/round-trip";
import { twinOf } from "@/builders/codec/twin";
import { twinErrors } from "@/builders/codec/twin-errors";
import type { DerivationRow } from "@/db/queries/derivations";
import type { DevicePoint, FamilyRules } from "@/lib/domain/compensation/types";
import { EVIDENCE_MAX, type PackageCheck } from "@/lib/domain/package-checks/check";
import { type CoverageFacts, checkCoverage } from "@/lib/domain/package-checks/coverage";
import { checkHexReading, type HexFault } from "@/lib/domain/package-checks/hex-reading";
import { checkLimits, type FieldExtremes } from "@/lib/domain/package-checks/limits";
import { checkPooling } from "@/lib/domain/package-checks/pooling";
import { checkProvenRange } from "@/lib/domain/package-checks/proven-range";
import { checkRoundTrip, type RoundTripFault } from "@/lib/domain/package-checks/round-trip";
import { checkTwin, type TwinPrediction } from "@/lib/domain/package-checks/twin";
import { checkVerification } from "@/lib/domain/package-checks/verification";
import { AppError } from "@/lib/errors";
import type { DeviceDetail } from "@/lib/services/derivations/compute";
import type { ComposedImage, PackageInputs } from "./compose-package";

interface Extreme {
  value: number;
  serial: string;
}

interface FieldRecord {
  field: CompiledField;
  lowest: Extreme | null;
  highest: Extreme | null;
  largestError: { error: number; serial: string } | null;
}

/** What the checks want to know of a package besides its images. */
export interface WholePackage {
  coverage: CoverageFacts;
  derivations: readonly DerivationRow[];
  provenRange: readonly [number, number] | null;
}

/**
 * Looks at every image of a package as it is composed, by what was decoded from its bytes, and gives the verdicts at the
 * end. Keeps only extremes, faults and one prediction a device, so that 50,000 devices fit.
 */
export class PackageChecker {
  readonly #inputs: PackageInputs;
  readonly #rules: FamilyRules;
  readonly #fields: FieldRecord[];
  readonly #faults: RoundTripFault[] = [];
  #faultCount = 0;
  readonly #hexFaults: HexFault[] = [];
  readonly #predictions: TwinPrediction[] = [];
  /** How many devices each derivation gave the values of. */
  readonly #devicesOf = new Map<string, number>();
  #devices = 0;

  constructor(inputs: PackageInputs) {
    this.#inputs = inputs;
    this.#rules = inputs.revision.document;
    this.#fields = inputs.layout.fields.map((field) => ({ field, lowest: null, highest: null, largestError: null }));
  }

  add(image: ComposedImage): void {
    this.#devices++;
    const { derivationId } = image.set;
    this.#devicesOf.set(derivationId, (this.#devicesOf.get(derivationId) ?? 0) + 1);
    this.#addValues(image);
    this.#addHex(image);
    this.#addPrediction(image);
  }

  #addValues({ device: { serial }, sources, bytes, decoded }: ComposedImage): void {
    for (const fault of listRoundTripFaults(this.#inputs.layout, sources, bytes, decoded)) {
      this.#faultCount++;
      if (this.#faults.length < EVIDENCE_MAX) this.#faults.push({ serial, ...fault });
    }
    this.#fields.forEach((record, i) => {
      const value = decoded[i]?.value;
      if (typeof value !== "number") return;
      if (!record.lowest || value < record.lowest.value) record.lowest = { value, serial };
      if (!record.highest || value > record.highest.value) record.highest = { value, serial };
      const error = Math.abs(value - (record.field.read(sources) as number));
      if (!record.largestError || error > record.largestError.error) record.largestError = { error, serial };
    });
  }

  #addHex({ device: { serial }, hex, bytes }: ComposedImage): void {
    const { layout } = this.#inputs;
    try {
      const at = findReadDifference(hex, bytes, layout);
      if (at !== undefined) this.#hexFaults.push({ serial, at, reason: `byte ${at} differs` });
    } catch (error) {
      if (!(error instanceof AppError)) throw error;
      this.#hexFaults.push({ serial, at: null, reason: error.message });
    }
  }

  /** Imported values have no points: nothing is predicted for them. */
  #addPrediction({ device: { serial }, set, decoded }: ComposedImage): void {
    const detail = set.detail as Partial<DeviceDetail>;
    const points: readonly DevicePoint[] = detail.points ?? [];
    if (points.length === 0) return;
    const { layout, revision } = this.#inputs;
    const twin = twinOf(layout, decoded, { referenceTemperature: revision.document.referenceC });
    const home = points.filter((point) => point.purpose === points[0]?.purpose);
    const errors = twinErrors(twin, points, home, this.#rules);
    this.#predictions.push({
      serial,
      spanErrorPpm: errors.spanErrorPpm,
      spanRatio: errors.spanRatio,
      // Without freedom left the fit passes through the points, and a shift of nothing would say nothing.
      zeroShiftRatio: typeof detail.zeroShiftRatio === "number" ? errors.zeroShiftRatio : null,
      independent: typeof detail.spanRatio === "number",
    });
  }

  /** The verdicts, in the order in which they are told. */
  finish({ coverage, derivations, provenRange }: WholePackage): PackageCheck[] {
    const { temperatureMinC, temperatureMaxC, confidence } = this.#rules;
    const unprovenDevices = derivations
      .filter((one) => one.provenLowC === null)
      .reduce((sum, one) => sum + (this.#devicesOf.get(one.id) ?? 0), 0);
    return [
      checkCoverage(coverage),
      checkLimits(this.#devices, this.#extremes()),
      checkRoundTrip({
        devices: this.#devices,
        values: this.#devices * this.#fields.length,
        checksums: this.#devices * this.#inputs.layout.checksums.length,
        faults: this.#faults,
        faultCount: this.#faultCount,
        largestErrors: this.#fields.flatMap(({ field, largestError }) =>
          largestError ? [{ field: field.name, unit: field.unit, ...largestError }] : [],
        ),
      }),
      checkHexReading({ devices: this.#devices, faults: this.#hexFaults }),
      checkPooling(derivations.flatMap(({ id, pooled }) => (pooled ? [{ id, pooled }] : []))),
      checkVerification(derivations, confidence),
      checkProvenRange({ temperatureMinC, temperatureMaxC, provenRange, unprovenDevices }),
      checkTwin(this.#devices, this.#predictions),
    ];
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
