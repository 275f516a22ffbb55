import semver from "semver";

/** True for a text that is a range of versions at all, be it an empty one such as ">2.0.0 <1.0.0". */
export function isRangeText(range: string): boolean {
  return semver.validRange(range) !== null;
}

/** True for a range that some version satisfies. */
export function isFirmwareRange(range: string): boolean {
  return isRangeText(range) && probes(range).some((version) => semver.satisfies(version, range));
}

/** True where one version lies in the range. A prerelease counts only where the range names it, as usual with ranges. */
export function isFirmwareOf(version: string, range: string): boolean {
  return semver.satisfies(version, range);
}

/** True where every version of `inner` lies in `outer`. Both must be ranges. */
export function isFirmwareWithin(inner: string, outer: string): boolean {
  return probes(inner, outer).every((version) => !semver.satisfies(version, inner) || semver.satisfies(version, outer));
}

/** True where some version lies in both ranges. Both must be ranges. */
export function mayShareFirmware(a: string, b: string): boolean {
  return probes(a, b).some((version) => semver.satisfies(version, a) && semver.satisfies(version, b));
}

/**
 * Versions that decide every question about these ranges. Belonging to a range changes only at the versions it names,
 * and versions are discrete, so each stretch without a change holds 0.0.0, a named version or the release right after one.
 */
function probes(...ranges: string[]): string[] {
  const named = ranges.flatMap((range) => new semver.Range(range).set.flat()).map((one) => one.semver);
  const found = named.flatMap((version) => {
    // The comparator of "any version" names none.
    if (!(version instanceof semver.SemVer)) return [];
    const { major, minor, patch } = version;
    return [
      version.version,
      `${major}.${minor}.${patch}`,
      `${major}.${minor}.${Math.min(patch + 1, Number.MAX_SAFE_INTEGER)}`,
    ];
  });
  return [...new Set(["0.0.0", ...found])];
}
