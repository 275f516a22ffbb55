import type { PlannedPoint } from "./run-plan";

/** A point as it is typed. */
export interface PointText {
  point: string;
  setC: string;
  soakMin: string;
  /** Parted by blanks or semicolons: a comma could be a decimal one. */
  loads: string;
  repeats: string;
  dwellS: string;
}

export type PointField = keyof PointText;

export interface ReadPoint {
  /** Undefined while a field is wrong. */
  point?: PlannedPoint;
  /** Why a field can't be taken. */
  wrong: Partial<Record<PointField, string>>;
}

const DECIMAL = /^[+-]?(\d+(\.\d*)?|\.\d+)$/;

/** A decimal number with a point; a true minus sign counts as one. */
export function readNumber(text: string): number | undefined {
  const plain = text.trim().replace("−", "-");
  return DECIMAL.test(plain) ? Number(plain) + 0 : undefined;
}

interface Bounds {
  min: number;
  max: number;
  whole?: boolean;
  unit: string;
}

const BOUNDS: Record<Exclude<PointField, "loads">, Bounds> = {
  point: { min: -999_999_999, max: 999_999_999, whole: true, unit: "" },
  setC: { min: -100, max: 250, unit: " °C" },
  soakMin: { min: 0, max: 10_080, unit: " min" },
  repeats: { min: 1, max: 50, whole: true, unit: "" },
  dwellS: { min: 0, max: 86_400, unit: " s" },
};

/** A typed point as the plan takes it, or what is wrong field by field. */
export function readPoint(text: PointText): ReadPoint {
  const wrong: ReadPoint["wrong"] = {};
  const number = (field: Exclude<PointField, "loads">): number => {
    const { min, max, whole, unit } = BOUNDS[field];
    const value = readNumber(text[field]);
    if (value !== undefined && value >= min && value <= max && (!whole || Number.isInteger(value))) return value;
    wrong[field] = `Takes ${whole ? "a whole number" : "a number"} from ${min} to ${max}${unit}.`.replaceAll("-", "−");
    return 0;
  };
  const loadsKg = text.loads
    .split(/[\s;]+/)
    .filter(Boolean)
    .map(readNumber);
  if (loadsKg.some((load) => load === undefined || load <= 0))
    wrong.loads =
      "Takes loads above 0 in kg with a decimal point, parted by blanks; the unloaded reading is always taken.";
  const point: PlannedPoint = {
    point: number("point"),
    setC: number("setC"),
    soakMin: number("soakMin"),
    loadsKg: loadsKg as number[],
    repeats: number("repeats"),
    dwellS: number("dwellS"),
  };
  return Object.keys(wrong).length > 0 ? { wrong } : { point, wrong };
}

/** A point as it stands in the fields. */
export function writePoint({ point, setC, soakMin, loadsKg, repeats, dwellS }: PlannedPoint): PointText {
  return {
    point: String(point),
    setC: String(setC),
    soakMin: String(soakMin),
    loads: loadsKg.join(" "),
    repeats: String(repeats),
    dwellS: String(dwellS),
  };
}
