import type { PointSummary } from "./drift-checks";
import type { FindingGatherer } from "./finding-gatherer";
import type { Reading } from "./types";

function isInOrder({ rows, times }: PointSummary): boolean {
  for (let i = 1; i < rows.length; i++)
    if (
      (rows[i] as Reading).soakMin < (rows[i - 1] as Reading).soakMin ||
      (times[i] as number) < (times[i - 1] as number)
    )
      return false;
  return true;
}

/** Soak time and clock of one point have to rise together. */
export function checkClock(serial: string, summary: PointSummary, found: FindingGatherer): void {
  if (isInOrder(summary)) return;
  const timed = summary.rows.map((reading, i) => ({ reading, time: summary.times[i] as number }));
  timed.sort((a, b) => a.reading.soakMin - b.reading.soakMin || a.time - b.time);
  let latest = Number.NEGATIVE_INFINITY;
  for (const { reading, time } of timed) {
    if (time < latest) found.add("clock.backwards", serial, summary.point, latest - time, { row: reading.row });
    else latest = time;
  }
}

function isSame(a: Reading, b: Reading): boolean {
  return (
    a.loadKg === b.loadKg &&
    a.signalMvV === b.signalMvV &&
    a.deviceTemp === b.deviceTemp &&
    a.chamberC === b.chamberC &&
    a.soakMin === b.soakMin
  );
}

/** Rows of one point that equal an earlier one in every figure and in their time: a block was pasted twice. */
export function checkDuplicates(serial: string, { rows, times, point }: PointSummary, found: FindingGatherer): void {
  if (rows.length < 2) return;
  const seen = new Map<number, Reading>();
  rows.forEach((row, i) => {
    const time = times[i] as number;
    const earlier = seen.get(time);
    if (!earlier) seen.set(time, row);
    else if (isSame(earlier, row))
      found.add("reading.duplicate", serial, point, 0, { row: row.row, earlier: earlier.row });
  });
}

/** Points of one device have to follow one another in time: it can't be at two temperatures at once. */
export function checkPointOrder(serial: string, points: readonly PointSummary[], found: FindingGatherer): void {
  if (points.length < 2) return;
  const spans = points.map(({ point, times }) => {
    let [from, to] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
    for (const time of times) {
      from = Math.min(from, time);
      to = Math.max(to, time);
    }
    return { point, from, to };
  });
  spans.sort((a, b) => a.from - b.from);
  let before = spans[0];
  for (const span of spans.slice(1)) {
    if (before && span.from < before.to)
      found.add("clock.points_overlap", serial, span.point, before.to - span.from, {
        point: span.point,
        other: before.point,
      });
    if (!before || span.to > before.to) before = span;
  }
}
