import type { Purpose } from "@/lib/domain/compensation/types";
import { type PointText, readPoint, writePoint } from "@/lib/domain/run-plan/point-text";
import { type PositionRule, placeSerials } from "@/lib/domain/run-plan/positions";
import { proposePoints } from "@/lib/domain/run-plan/propose-points";
import type { PlannedDevice, PlannedPoint } from "@/lib/domain/run-plan/run-plan";
import { readSerials } from "@/lib/domain/serials";
import type { SampleDrawView } from "@/schemas/api/sample-draws";

/** A point as typed, with a key that outlives moving it. */
export type DraftPoint = PointText & { key: number };

/** A plan as it is being written: texts as typed, so that nothing is lost while they are wrong. */
export interface PlanDraft {
  name: string;
  purpose: Purpose;
  serials: string;
  rule: { prefix: string; from: string; digits: string };
  /** Places that were typed by hand, by serial. */
  places: Record<string, string>;
  points: DraftPoint[];
  equipment: string[];
  notes: string;
  draw?: SampleDrawView;
}

type Family = Parameters<typeof proposePoints>[0];

/** Fields with the points that follow from the family's rules for a purpose. */
export function proposedPoints(family: Family, purpose: Purpose): DraftPoint[] {
  return proposePoints(family, purpose).map((point, key) => ({ ...writePoint(point), key }));
}

export function startDraft(family: Family): PlanDraft {
  return {
    name: "",
    purpose: "sample",
    serials: "",
    rule: { prefix: "P", from: "1", digits: "2" },
    places: {},
    points: proposedPoints(family, "sample"),
    equipment: [],
    notes: "",
  };
}

const wholeOf = (text: string, fallback: number) => (/^\d{1,6}$/.test(text.trim()) ? Number(text) : fallback);

/** The rule as numbers; what is no number counts as 1. */
export function positionRuleOf({ rule }: PlanDraft): PositionRule {
  return { prefix: rule.prefix, from: wholeOf(rule.from, 1), digits: Math.min(6, wholeOf(rule.digits, 1)) };
}

export interface ReadDraft {
  devices: PlannedDevice[];
  /** Texts that can't be a serial. */
  refused: { line: number; text: string }[];
  repeated: number;
  /** Points whose fields can all be taken. */
  points: PlannedPoint[];
  /** Whether every point can be taken. */
  pointsComplete: boolean;
  /** The devices are exactly those drawn. */
  isDrawn: boolean;
}

/** A draft as the plan takes it, as far as it can be read. */
export function readDraft(draft: PlanDraft): ReadDraft {
  const { serials, refused, repeated } = readSerials(draft.serials);
  const devices = placeSerials(serials, positionRuleOf(draft)).map(({ serial, position }) => ({
    serial,
    position: (draft.places[serial] ?? position).trim(),
  }));
  const read = draft.points.map(readPoint);
  const points = read.flatMap((one) => one.point ?? []);
  const drawn = new Set(draft.draw?.serials);
  const isDrawn = drawn.size > 0 && drawn.size === serials.length && serials.every((serial) => drawn.has(serial));
  return { devices, refused, repeated, points, pointsComplete: points.length === read.length, isDrawn };
}
