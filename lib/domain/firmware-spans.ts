import semver from "semver";

/** Ranges of firmware drawn beside one another: where any of them begins or ends, and what each covers between. */
export interface FirmwareSpans {
  /** Rising versions; each begins a stretch that ends before the next one, the last one has no end. */
  stops: string[];
  /** For each range, for each stretch: whether the range has its versions. */
  covers: boolean[][];
}

/**
 * Stretches of versions that no range cuts. A prerelease counts as the release it leads to, and what is no range covers nothing.
 * @param others versions that should begin a stretch too.
 */
export function firmwareSpans(ranges: readonly string[], others: readonly string[] = []): FirmwareSpans {
  const named = [...ranges.flatMap(changesOf), ...others.filter((version) => semver.valid(version) !== null)];
  const stops = [...new Set(named)].sort(semver.compare);
  const covers = ranges.map((range) =>
    stops.map((stop) => semver.validRange(range) !== null && semver.satisfies(stop, range)),
  );
  const first = stops.findIndex((_, i) => covers.some((row) => row[i]) || others.includes(stops[i] as string));
  return { stops: stops.slice(Math.max(first, 0)), covers: covers.map((row) => row.slice(Math.max(first, 0))) };
}

/** Versions at which belonging to a range may change. */
function changesOf(range: string): string[] {
  if (semver.validRange(range) === null) return [];
  return ["0.0.0", ...new semver.Range(range).set.flat().flatMap(changesOfComparator)];
}

function changesOfComparator({ operator, semver: version }: semver.Comparator): string[] {
  // The comparator of "any version" names none.
  if (!(version instanceof semver.SemVer)) return [];
  const at = `${version.major}.${version.minor}.${version.patch}`;
  const next = `${version.major}.${version.minor}.${version.patch + 1}`;
  if (operator === ">=" || operator === "<") return [at];
  return operator === "" ? [at, next] : [next];
}

/** Runs of stretches that a range covers without a break, as first and last index. */
export function runsOf(covers: readonly boolean[]): [from: number, to: number][] {
  const runs: [number, number][] = [];
  covers.forEach((covered, i) => {
    const last = runs.at(-1);
    if (covered && last && last[1] === i - 1) last[1] = i;
    else if (covered) runs.push([i, i]);
  });
  return runs;
}
