import type { FamilyRules, Purpose } from "@/lib/domain/compensation/types";
import type { PlannedPoint } from "./run-plan";

/** Seconds under load before reading where nobody says otherwise; common practice, no source. */
const DWELL_S = 30;
const REPEATS = 3;

const whole = (value: number) => Math.round(value * 10) / 10;

/**
 * Points to begin a plan with: the ends of the family's range and the reference between them, coldest first, then back to
 * the first temperature, so that a lasting shift shows. A span run stays at the reference.
 * @returns points 1, 2, …; loads at capacity, none for a zero run.
 */
export function proposePoints(family: FamilyRules, purpose: Purpose): PlannedPoint[] {
  const { temperatureMinC, temperatureMaxC, referenceC, capacityKg, minSoakMinutes } = family;
  const loaded = purpose !== "zero";
  const ends = [temperatureMinC, referenceC, temperatureMaxC].map(whole);
  const [low, , high] = ends as [number, number, number];
  const inside = referenceC - low >= 5 && high - referenceC >= 5 ? ends : [low, high];
  const temperatures = purpose === "span" ? [whole(referenceC)] : [...inside, low];
  return temperatures.map((setC, index) => ({
    point: index + 1,
    setC,
    soakMin: minSoakMinutes,
    loadsKg: loaded ? [capacityKg] : [],
    repeats: REPEATS,
    dwellS: loaded ? DWELL_S : 0,
  }));
}
