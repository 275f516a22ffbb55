import type { CompiledLayout } from "@/builders/codec/compile-layout";
import type { CoefficientValues } from "@/builders/codec/sources";
import { type Twin, twinOf } from "@/builders/codec/twin/twin";
import { twinErrors } from "@/builders/codec/twin/twin-errors";
import { twinRange } from "@/builders/codec/twin/twin-range";
import type { Coefficients, DevicePoint, FamilyRules } from "@/lib/domain/compensation/types";
import type { PackageCheck } from "@/lib/domain/package-checks/check";
import { checkTwin, type TwinPrediction, type TwinRangeFacts } from "@/lib/domain/package-checks/twin";
import type { DeviceDetail } from "@/lib/services/derivations/compute";
import type { ComposedImage } from "../compose-package";

/** Computes with each image as its firmware will: at the lot's own readings, and over the family's temperatures. */
export class TwinGatherer {
  readonly #layout: CompiledLayout;
  readonly #rules: FamilyRules;
  readonly #predictions: TwinPrediction[] = [];
  readonly #range: TwinRangeFacts = { overflows: [], overflowCount: 0, spanRounding: null, zeroRounding: null };
  #devices = 0;

  constructor(layout: CompiledLayout, rules: FamilyRules) {
    this.#layout = layout;
    this.#rules = rules;
  }

  add({ device: { serial }, set, decoded }: ComposedImage): void {
    this.#devices++;
    const family = { referenceTemperature: this.#rules.referenceC };
    const twin = twinOf(this.#layout, decoded, family);
    const exact = { coefficients: exactOf(set.coefficients as Coefficients), ...family };
    this.#addRange(serial, twin, exact);
    const detail = set.detail as Partial<DeviceDetail>;
    const points: readonly DevicePoint[] = detail.points ?? [];
    // Imported values have no points: nothing is predicted for them.
    if (points.length === 0) return;
    const home = points.filter((point) => point.purpose === points[0]?.purpose);
    const { span, zero } = twinErrors(twin, points, home, this.#rules, exact);
    // Without freedom left the fit passes through the points, and a shift of nothing would say nothing.
    const shift = typeof detail.zeroShiftRatio === "number" ? zero : null;
    this.#predictions.push({
      serial,
      spanErrorPpm: span?.errorPpm ?? null,
      spanRatio: span?.ratio ?? null,
      spanAtC: span?.chamberC ?? null,
      spanRoundingPpm: span?.roundingPpm ?? null,
      largestRoundingPpm: span?.largestRoundingPpm ?? null,
      zeroShiftRatio: shift?.ratio ?? null,
      zeroBetweenC: shift?.betweenC ?? null,
      zeroRoundingRatio: shift?.roundingRatio ?? null,
      independent: typeof detail.spanRatio === "number",
    });
  }

  #addRange(serial: string, twin: Twin, exact: Twin): void {
    const { overflow, spanRounding, zeroRounding } = twinRange(twin, exact, this.#rules);
    const range = this.#range;
    if (overflow && range.overflowCount++ < EVIDENCE_OVERFLOWS) range.overflows.push({ serial, ...overflow });
    if (spanRounding && spanRounding.ppm > (range.spanRounding?.ppm ?? -1))
      range.spanRounding = { serial, ...spanRounding };
    if (zeroRounding && zeroRounding.mvV > (range.zeroRounding?.mvV ?? -1))
      range.zeroRounding = { serial, ...zeroRounding };
  }

  twin(): PackageCheck {
    return checkTwin(this.#devices, this.#predictions, this.#range);
  }
}

const EVIDENCE_OVERFLOWS = 20;

function exactOf(coefficients: Coefficients): CoefficientValues {
  return { ...coefficients, zeroTc2: coefficients.zeroTc2 ?? null, gainTc2: coefficients.gainTc2 ?? null };
}
