import { formatCount, formatFigure } from "@/lib/domain/format/figure";
import { devices, EVIDENCE_MAX, type PackageCheck, serialEvidence, someSerials } from "./check";

/** What a device will show at the lot's own readings when it computes with what its image holds. */
export interface TwinPrediction {
  serial: string;
  /** The span error of largest magnitude over its loaded points, signed, ppm; null where it was never loaded. */
  spanErrorPpm: number | null;
  /** Largest share of the envelope; ≤ 1 is inside. */
  spanRatio: number | null;
  /** Null where the zero fit has no freedom. */
  zeroShiftRatio: number | null;
  /** Whether a loaded point speaks that the gain was not taken from. */
  independent: boolean;
}

/**
 * Whether every device will stay inside the temperature envelope at the readings of its lot, computed with its decoded values.
 * A device counts as judged only by what its values were not fitted through.
 * @param packed how many devices the package has; those without readings are in no prediction.
 */
export function checkTwin(packed: number, predictions: readonly TwinPrediction[]): PackageCheck {
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
  if (withoutReadings > 0 && predictions.length > 0)
    sentences.push(`Of ${devices(withoutReadings)} there are no readings.`);
  return {
    code: "twin",
    verdict: predictions.length === 0 || outside.length > 0 ? "warn" : "pass",
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

function largestOf(judged: readonly TwinPrediction[]): string[] {
  const sentences: string[] = [];
  const [span] = judged
    .filter((one) => one.spanRatio !== null && one.independent)
    .sort((a, b) => (b.spanRatio as number) - (a.spanRatio as number));
  const [zero] = judged
    .filter((one) => one.zeroShiftRatio !== null)
    .sort((a, b) => (b.zeroShiftRatio as number) - (a.zeroShiftRatio as number));
  if (span)
    sentences.push(
      `Largest span error ${formatFigure(span.spanErrorPpm, { digits: 0, sign: "always" })} ppm, ${formatFigure(span.spanRatio)} of the limit (${span.serial}).`,
    );
  if (zero) sentences.push(`Largest zero shift ${formatFigure(zero.zeroShiftRatio)} of the limit (${zero.serial}).`);
  return sentences;
}
