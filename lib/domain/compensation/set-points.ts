import { forEachInSteps, type Steps } from "@/lib/domain/steps";
import { FindingGatherer } from "./finding-gatherer";
import type { Finding, Reading } from "./types";

/** How far a chamber may be off the temperature planned, K: OIML R 60-2:2021, 2.10.1 (20 °C ± 2 °C). */
const OFF_SET_POINT_K = 2;

/**
 * Where the chamber was not at the temperature that was planned for a point. Points without a plan are passed over.
 * @param planned set point of each point, °C.
 */
export function* listSetPointFindings(
  readings: readonly Reading[],
  planned: readonly { point: number; setC: number }[],
  toleranceK = OFF_SET_POINT_K,
): Steps<Finding[]> {
  const setPoints = new Map(planned.map(({ point, setC }) => [point, setC]));
  const found = new FindingGatherer();
  yield* forEachInSteps(readings, ({ serial, point, chamberC }) => {
    const setC = setPoints.get(point);
    if (setC === undefined) return;
    const off = Math.abs(chamberC - setC);
    if (off > toleranceK + 1e-9)
      found.add("chamber.off_set_point", serial, point, off, { chamberC, setC, toleranceK, point });
  });
  return found.list();
}
