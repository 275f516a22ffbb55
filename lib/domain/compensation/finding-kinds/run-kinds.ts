import { devices, type Kind, show } from "./words";

/** Findings on the readings of a run. */
export const RUN_KINDS = {
  "soak.too_short": {
    severity: "soft",
    words: (f) =>
      `Read after ${show(f.soakMin)} min of steady chamber temperature where the family asks for ` +
      `${show(f.minSoakMinutes)} min (${devices(f)}): the cell may not have been at the temperature noted.`,
  },
  "span.temperature_too_small": {
    severity: "soft",
    words: (f) =>
      `The temperatures span ${show(f.spanK)} K where the family asks for ${show(f.minTemperatureSpanK)} K ` +
      `(${devices(f)}): reading errors weigh more in the coefficients.`,
  },
  "temperatures.not_distinct": {
    severity: "soft",
    words: (f) =>
      `Only one temperature counts (${devices(f)}): points have to be 5 K apart, or no coefficient of temperature follows.`,
  },
  "load.below_threshold": {
    severity: "soft",
    words: (f) =>
      `Loaded with ${show(f.loadKg)} kg where the family asks for at least ${show(f.minLoadKg)} kg (${devices(f)}).`,
  },
  "load.above_capacity": {
    severity: "soft",
    words: (f) => `Loaded with ${show(f.loadKg)} kg, above the capacity of ${show(f.capacityKg)} kg (${devices(f)}).`,
  },
  "load.missing": {
    severity: "soft",
    words: (f) => `No loaded reading at a point of a run that is loaded at each (${devices(f)}).`,
  },
  "point.missing": {
    severity: "note",
    words: (f) => `A point at which most devices of the run were read is missing for ${devices(f)}.`,
  },
  "point.unstable": {
    severity: "soft",
    words: (f) =>
      `The chamber temperature of one point spreads over ${show(f.spreadK)} K (${devices(f)}); ` +
      `OIML R 60-2, 2.7.3.1 allows ${show(f.limitK)} K.`,
  },
  "point.no_return": {
    severity: "note",
    words: (f) =>
      `No point of the ${show(f.purpose)} run returns to an earlier temperature: a lasting shift can't be told from drift.`,
  },
  "repeats.scatter": {
    severity: "soft",
    words: (f) =>
      `Repeats of one reading differ by ${show(f.spreadV)} v; OIML R 60-1, 5.4 allows ${show(f.limitV)} v at that load ` +
      `(${devices(f)}).`,
  },
  "reading.outlier": {
    severity: "soft",
    words: (f) =>
      `Row ${show(f.row)} stands out from its repeats (Grubbs G ${show(f.g)}, critical ${show(f.critical)}; ${devices(f)}).`,
  },
  "reading.copied": {
    severity: "note",
    words: (f) => `${show(f.devices)} devices have exactly the readings of another one: was a block copied?`,
  },
  "clock.backwards": {
    severity: "soft",
    words: (f) =>
      `Row ${show(f.row)} was taken earlier than a reading with a shorter soak time (${devices(f)}): one of the two is wrong.`,
  },
  "thermometer.not_monotonic": {
    severity: "soft",
    words: (f) =>
      `The device's own temperature does not follow the chamber in one direction (${devices(f)}): were points or devices mixed up?`,
  },
  "span.far_from_reference": {
    severity: "note",
    words: (f) =>
      `The span run was at ${show(f.chamberC)} °C, more than 5 K from the reference of ${show(f.referenceC)} °C ` +
      `(${devices(f)}): gain leans on gainTc.`,
  },
  "thermometer.drifting": {
    severity: "soft",
    words: (f) =>
      `The device's own temperature still moved by ${show(f.driftK)} K in 15 min where ${show(f.limitK)} K counts as steady ` +
      `(${devices(f)}): the cells were not soaked through, whatever the soak time noted.`,
  },
  "chamber.off_set_point": {
    severity: "soft",
    words: (f) =>
      `The chamber was at ${show(f.chamberC)} °C at point ${show(f.point)}, which was planned for ${show(f.setC)} °C ` +
      `± ${show(f.toleranceK)} K (${devices(f)}).`,
  },
  "dwell.differs": {
    severity: "soft",
    words: (f) =>
      `Time under load before the reading goes from ${show(f.shortestS)} to ${show(f.longestS)} s between the points ` +
      `(${devices(f)}): creep then enters gainTc.`,
  },
  "reading.duplicate": {
    severity: "soft",
    words: (f) =>
      `Row ${show(f.row)} repeats row ${show(f.earlier)} to the last digit and the same second (${devices(f)}): ` +
      "it counts twice in the mean.",
  },
  "clock.points_overlap": {
    severity: "soft",
    words: (f) =>
      `Readings of point ${show(f.point)} were taken between those of point ${show(f.other)} (${devices(f)}): a device ` +
      "can't be at two temperatures at a time.",
  },
  "zero.return_difference": {
    severity: "soft",
    words: (f) =>
      `Back at ${show(f.chamberC)} °C, zero differs by ${show(f.changeV)} v; ${show(f.limitV)} v is what OIML R 60-1, 5.6.1 ` +
      `leaves to one step of temperature (${devices(f)}): a lasting shift, which no coefficient corrects.`,
  },
} as const satisfies Record<string, Kind>;
