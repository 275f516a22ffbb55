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

const worstOf = ({ spanRatio, zeroShiftRatio }: TwinPrediction) => Math.max(spanRatio ?? 0, zeroShiftRatio ?? 0);

/**
 * Whether every device will stay inside the temperature envelope at the readings of its lot, computed with its decoded values.
 * @param packed how many devices the package has; those without readings are in no prediction.
 */
export function checkTwin(packed: number, predictions: readonly TwinPrediction[]): PackageCheck {
  const judged = predictions.filter((one) => one.spanRatio !== null || one.zeroShiftRatio !== null);
  const outside = judged.filter((one) => worstOf(one) > 1).map((one) => one.serial);
  const neverLoaded = predictions.filter((one) => one.spanRatio === null).map((one) => one.serial);
  const atTrimPoint = predictions.filter((one) => one.spanRatio !== null && !one.independent);
  const worst = [...judged].sort((a, b) => worstOf(b) - worstOf(a));
  const [span] = [...judged].sort((a, b) => (b.spanRatio ?? -1) - (a.spanRatio ?? -1));
  const [zero] = [...judged].sort((a, b) => (b.zeroShiftRatio ?? -1) - (a.zeroShiftRatio ?? -1));
  const withoutReadings = packed - predictions.length;
  const sentences: string[] = [];
  if (judged.length === 0)
    sentences.push("No reading of the lot speaks on a device of this package: nothing is predicted.");
  else if (outside.length > 0)
    sentences.push(
      `${formatCount(outside.length)} of ${devices(judged.length)} are predicted outside the envelope (${someSerials(outside)}).`,
    );
  else sentences.push(`Computed with its decoded values, each of ${devices(judged.length)} stays inside the envelope.`);
  if (span && span.spanRatio !== null)
    sentences.push(
      `Largest span error ${formatFigure(span.spanErrorPpm, { digits: 0, sign: "always" })} ppm, ${formatFigure(span.spanRatio)} of the limit (${span.serial}).`,
    );
  if (zero && zero.zeroShiftRatio !== null)
    sentences.push(`Largest zero shift ${formatFigure(zero.zeroShiftRatio)} of the limit (${zero.serial}).`);
  if (atTrimPoint.length > 0)
    sentences.push(
      `${devices(atTrimPoint.length)} ${atTrimPoint.length === 1 ? "was" : "were"} loaded only where the gain was taken from: no statement on span over temperature.`,
    );
  if (neverLoaded.length > 0)
    sentences.push(
      `${devices(neverLoaded.length)} ${neverLoaded.length === 1 ? "was" : "were"} never loaded (${someSerials(neverLoaded)}): no statement on span.`,
    );
  if (withoutReadings > 0) sentences.push(`${devices(withoutReadings)} without readings.`);
  return {
    code: "twin",
    verdict: judged.length === 0 || outside.length > 0 ? "warn" : "pass",
    message: sentences.join(" "),
    evidence: {
      devices: packed,
      judged: judged.length,
      spanJudged: predictions.filter((one) => one.spanRatio !== null && one.independent).length,
      atTrimPointOnly: atTrimPoint.length,
      zeroJudged: predictions.filter((one) => one.zeroShiftRatio !== null).length,
      neverLoaded: serialEvidence(neverLoaded),
      withoutReadings,
      outside: serialEvidence(outside),
      worst: worst.slice(0, EVIDENCE_MAX),
    },
  };
}
