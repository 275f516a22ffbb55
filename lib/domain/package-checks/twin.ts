import { formatCount, formatFigure } from "@/lib/domain/format/figure";
import { devices, EVIDENCE_MAX, type PackageCheck, serialEvidence, someSerials } from "./check";

/** What a device will show at the lot's own readings when it computes with what its image holds. */
export interface TwinPrediction {
  serial: string;
  /** The span error of largest magnitude over its loaded points, signed, ppm; null where it was never loaded. */
  spanErrorPpm: number | null;
  /** Largest share of the envelope; ≤ 1 is inside. */
  spanRatio: number | null;
  /** Chamber temperature of that error, °C. */
  spanAtC: number | null;
  /** The part of that error that is due to rounding, signed, and the largest over all loaded points, sign-free; ppm. */
  spanRoundingPpm: number | null;
  largestRoundingPpm: number | null;
  /** Null where the zero fit has no freedom. */
  zeroShiftRatio: number | null;
  /** Temperatures between which it is, °C. */
  zeroBetweenC: readonly [number, number] | null;
  /** What rounding makes of it, as a share of the same limit. */
  zeroRoundingRatio: number | null;
  /** Whether a loaded point speaks that the gain was not taken from. */
  independent: boolean;
}

/** What is said of all devices over the family's temperatures, measured there or not: nothing but overflow and rounding. */
export interface TwinRangeFacts {
  /** Devices in which a quantity leaves what single precision holds, or a gain is not above 0; some of them. */
  overflows: { serial: string; quantity: string; atC: number }[];
  overflowCount: number;
  /** Largest change by rounding, with its device and temperature. */
  spanRounding: { serial: string; ppm: number; atC: number } | null;
  zeroRounding: { serial: string; mvV: number; atC: number } | null;
}

/**
 * Whether every device will stay inside the temperature envelope at the readings of its lot, computed with its decoded values.
 * A device counts as judged only by what its values were not fitted through.
 * @param packed how many devices the package has; those without readings are in no prediction.
 */
export function checkTwin(packed: number, predictions: readonly TwinPrediction[], range: TwinRangeFacts): PackageCheck {
  const judged = predictions.filter(isJudged);
  const outside = predictions.filter((one) => worstOf(one) > 1).map((one) => one.serial);
  const neverLoaded = predictions.filter((one) => one.spanRatio === null).map((one) => one.serial);
  const fittedOnly = predictions.filter((one) => one.spanRatio !== null && !one.independent).length;
  const withoutReadings = packed - predictions.length;
  const sentences = [verdictSentence(predictions.length, judged.length, outside), ...largestOf(judged)];
  if (fittedOnly > 0)
    sentences.push(
      `${devices(fittedOnly)} ${fittedOnly === 1 ? "was" : "were"} loaded only where the gain was taken from: no statement on span over temperature.`,
    );
  if (neverLoaded.length > 0)
    sentences.push(
      `${devices(neverLoaded.length)} ${neverLoaded.length === 1 ? "was" : "were"} never loaded (${someSerials(neverLoaded)}): no statement on span.`,
    );
  const zeroOpen = predictions.filter((one) => one.zeroShiftRatio === null).length;
  if (zeroOpen > 0)
    sentences.push(
      `Zero of ${devices(zeroOpen)} is not judged: no reading is left beside those that the zero was fitted through.`,
    );
  if (withoutReadings > 0 && predictions.length > 0)
    sentences.push(`Of ${devices(withoutReadings)} there are no readings.`);
  sentences.push(...rangeSentences(range));
  return {
    code: "twin",
    verdict: range.overflowCount > 0 ? "fail" : predictions.length === 0 || outside.length > 0 ? "warn" : "pass",
    message: sentences.join(" "),
    evidence: {
      devices: packed,
      judged: judged.length,
      spanJudged: predictions.filter((one) => one.spanRatio !== null && one.independent).length,
      atTrimPointOnly: fittedOnly,
      zeroJudged: predictions.filter((one) => one.zeroShiftRatio !== null).length,
      neverLoaded: serialEvidence(neverLoaded),
      withoutReadings,
      outside: serialEvidence(outside),
      span: largestBy(
        judged.filter((one) => one.independent),
        (one) => one.spanRatio,
      ),
      zero: largestBy(judged, (one) => one.zeroShiftRatio),
      rounding: roundingOf(predictions),
      range,
      worst: [...predictions].sort((a, b) => worstOf(b) - worstOf(a)).slice(0, EVIDENCE_MAX),
    },
  };
}

const worstOf = ({ spanRatio, zeroShiftRatio }: TwinPrediction) => Math.max(spanRatio ?? 0, zeroShiftRatio ?? 0);

const isJudged = ({ spanRatio, zeroShiftRatio, independent }: TwinPrediction) =>
  (spanRatio !== null && independent) || zeroShiftRatio !== null;

function verdictSentence(withReadings: number, judged: number, outside: readonly string[]): string {
  if (withReadings === 0) return "The lot has no readings of these devices: nothing is predicted.";
  if (outside.length > 0)
    return `${formatCount(outside.length)} of ${devices(withReadings)} are predicted outside the envelope (${someSerials(outside)}).`;
  if (judged === 0) return "The values pass through all readings: none is left to judge them.";
  return `Computed with its decoded values, each of ${devices(judged)} with readings to judge it stays inside the envelope.`;
}

/** The prediction with the largest figure; null where none has one. */
function largestBy(
  predictions: readonly TwinPrediction[],
  figure: (one: TwinPrediction) => number | null,
): TwinPrediction | null {
  let largest: TwinPrediction | null = null;
  for (const one of predictions) {
    const value = figure(one);
    if (value !== null && (largest === null || value > (figure(largest) as number))) largest = one;
  }
  return largest;
}

function roundingOf(predictions: readonly TwinPrediction[]): { serial: string; ppm: number } | null {
  const largest = largestBy(predictions, (one) => one.largestRoundingPpm);
  return largest && { serial: largest.serial, ppm: largest.largestRoundingPpm as number };
}

function rangeSentences({ overflows, overflowCount }: TwinRangeFacts): string[] {
  const [first] = overflows;
  if (!first) return [];
  return [
    `Over the family's temperatures the arithmetic of ${devices(overflowCount)} overflows: ${first.quantity} of ${first.serial} at ${formatFigure(first.atC, { digits: 1 })} °C.`,
  ];
}

function largestOf(judged: readonly TwinPrediction[]): string[] {
  const sentences: string[] = [];
  const span = largestBy(
    judged.filter((one) => one.independent),
    (one) => one.spanRatio,
  );
  const zero = largestBy(judged, (one) => one.zeroShiftRatio);
  if (span)
    sentences.push(
      `Largest span error ${formatFigure(span.spanErrorPpm, { digits: 0, sign: "always" })} ppm, ${formatFigure(span.spanRatio)} of the limit (${span.serial}${span.spanAtC === null ? "" : ` at ${formatFigure(span.spanAtC, { digits: 1 })} °C`}); ${formatFigure(Math.abs(span.spanRoundingPpm ?? 0), { digits: 1 })} ppm of it are rounding.`,
    );
  if (zero) sentences.push(`Largest zero shift ${formatFigure(zero.zeroShiftRatio)} of the limit (${zero.serial}).`);
  return sentences;
}
