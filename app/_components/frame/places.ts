/** One of the five places of the frame. `covers` are the paths that belong to it, `key` follows `g`. */
export interface Place {
  name: string;
  href: string;
  key: string;
  covers: readonly string[];
}

const places: readonly Place[] = [
  { name: "Today", href: "/today", key: "t", covers: ["/today"] },
  { name: "Lots", href: "/lots", key: "l", covers: ["/lots", "/packages", "/derivations", "/runs"] },
  { name: "Layouts", href: "/families", key: "f", covers: ["/families"] },
  { name: "Trace", href: "/trace", key: "r", covers: ["/trace", "/compare"] },
  { name: "Stations", href: "/stations", key: "s", covers: ["/stations"] },
];

/** Operators write devices and look them up; the rest is not theirs. */
const operatorPlaces: readonly Place[] = [
  { name: "Bench", href: "/stations/bench", key: "b", covers: ["/stations/bench"] },
  { name: "Trace", href: "/trace", key: "r", covers: ["/trace"] },
];

/** The places of a person with these roles. */
export function placesOf(roles: readonly string[]): readonly Place[] {
  return roles.every((role) => role === "operator") ? operatorPlaces : places;
}

/** True where the path lies in the place. */
export function isInPlace(place: Place, path: string): boolean {
  return place.covers.some((prefix) => path === prefix || path.startsWith(`${prefix}/`));
}
