import type { Finding, Severity } from "./types";

type Facts = Record<string, unknown>;

interface Kind {
  severity: Severity;
  /** The sentence people read, from the finding's own data. */
  words: (facts: Facts) => string;
}

/** A number or text of the data as people read it: at most six significant digits. */
function show(value: unknown): string {
  return typeof value === "number" ? String(Number(value.toPrecision(6))) : String(value);
}

function ppm(value: unknown): string {
  return typeof value === "number" ? `${show(value * 1e6)} ppm/K` : "unknown";
}

function percent(value: unknown): string {
  // Cut, not rounded: a share shown must not look larger than it is.
  return typeof value === "number" ? `${Math.floor(value * 1000) / 10} %` : "unknown";
}

/** "this device" or "12 devices", for findings that gather the devices of a run. */
function devices({ devices: count }: Facts): string {
  return count === 1 ? "one device" : `${count} devices`;
}

/**
 * Every finding the arithmetic can make. hard: the numbers are invalid or the contract forbids them; soft: they may be
 * right, which a person has to judge and say why; note: worth knowing, nothing to decide.
 */
const KINDS = {
  // Of a run
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
  // Of a device
  "device.excluded": { severity: "note", words: (f) => `Excluded, gets no coefficients: ${show(f.reason)}` },
  "device.span_only": {
    severity: "hard",
    words: () => "Only a span run: without readings at several temperatures it gets no coefficients.",
  },
  "device.board_changed": {
    severity: "hard",
    words: () => "The runs were taken with different boards: readings of one don't hold for the other.",
  },
  "device.outside_envelope": {
    severity: "soft",
    words: (f) =>
      `On its own readings it uses ${show(f.spanRatio ?? "an unknown part")} of the error envelope for span and ` +
      `${show(f.zeroShiftRatio ?? "an unknown part")} of the limit at minimum load.`,
  },
  "temperatures.too_few": {
    severity: "hard",
    words: (f) =>
      `Order ${show(f.order)} needs ${show(f.needed)} temperatures 5 K apart; there are ${show(f.distinct)}.`,
  },
  "thermometer.no_slope": {
    severity: "hard",
    words: () => "The device's own temperature does not change with the chamber: no thermometer fits.",
  },
  "signal.not_rising": {
    severity: "hard",
    words: (f) =>
      `The loaded signal is not above the unloaded one at point ${show(f.point)}: swapped rows, or no load.`,
  },
  "gain.not_loaded": {
    severity: "hard",
    words: () => "An individual trim needs loaded readings, and this device has none.",
  },
  "gain.temperatures_too_few": {
    severity: "hard",
    words: (f) =>
      `An individual trim of order ${show(f.order)} needs loaded readings at ${show(f.needed)} temperatures 5 K apart; ` +
      `there are ${show(f.distinct)}.`,
  },
  "gain.not_trimmed": {
    severity: "soft",
    words: (f) =>
      `Never loaded: it gets the mean gain of the sample, and nothing is said on its span` +
      (typeof f.sdGain === "number" ? ` (gains of the sample scatter by ${show(f.sdGain)}).` : "."),
  },
  "gain.far_from_nominal": {
    severity: "soft",
    words: (f) => `Gain ${show(f.gain)} is far from 1: check load, capacity and nominal output.`,
  },
  "sample.trim_missing": {
    severity: "soft",
    words: (f) =>
      `In the sample run, but without loaded readings at ${show(f.needed)} temperatures 5 K apart: it does not enter gainTc.`,
  },
  "coefficient.outlier": {
    severity: "soft",
    words: (f) =>
      `gainTc ${ppm(f.gainTc)} stands out from the sample (Grubbs G ${show(f.g)}, critical ${show(f.critical)}).`,
  },
  "verification.in_sample": {
    severity: "note",
    words: () => "In the sample as well as in the verification run: it proves nothing on the rest of the lot.",
  },
  "result.not_finite": {
    severity: "hard",
    words: () => "The readings lead to no usable number.",
  },
  // Of the derivation
  "sample.too_small": {
    severity: "hard",
    words: (f) => `A pooled gain coefficient needs at least ${show(f.needed)} sample devices; there are ${show(f.n)}.`,
  },
  "pooled.limit_exceeded": {
    severity: "hard",
    words: (f) =>
      `${percent(f.coverage)} of the lot are expected within ±${ppm(f.halfWidth)} of the mean, which is more than the ` +
      `pooling limit of ±${ppm(f.limit)}: trim individually, or find out why the sample scatters.`,
  },
  "verification.missing": {
    severity: "soft",
    words: () => "No verification device: the pooled gain coefficient is not proven on a device outside the sample.",
  },
  "verification.failed": {
    severity: "hard",
    words: (f) => `${show(f.failed)} of ${show(f.judged)} verification devices are outside the error envelope.`,
  },
  "verification.not_judged": {
    severity: "soft",
    words: (f) => `${show(f.count)} verification devices have no reading that could judge them.`,
  },
  "verification.share_shown": {
    severity: "note",
    words: (f) =>
      `${show(f.passed)} of ${show(f.passed)} verification devices passed: that alone shows only that at least ` +
      `${percent(f.share)} of the lot would (confidence ${percent(f.confidence)}).`,
  },
  "exclusion.unknown_serial": {
    severity: "hard",
    words: (f) => `${show(f.serial)} is to be excluded but is in none of the runs: is the serial right?`,
  },
  "fit.no_freedom": {
    severity: "note",
    words: (f) => `The fit passes through all points (${devices(f)}): it can't show its own error.`,
  },
  "range.not_proven": {
    severity: "note",
    words: (f) =>
      `Proven from ${show(f.low)} to ${show(f.high)} °C; the family's range is ${show(f.temperatureMinC)} to ` +
      `${show(f.temperatureMaxC)} °C, and statements beyond are not proven.`,
  },
  "range.none_common": {
    severity: "soft",
    words: () => "The devices have no common range of temperature: nothing is proven for all of them.",
  },
  "run.proof_not_used": {
    severity: "note",
    words: () => "A proof run says nothing on coefficients and was not used.",
  },
  "run.superseded": {
    severity: "note",
    words: (f) => `Run ${show(f.run)} was superseded by ${show(f.by)}; its rows were not used.`,
  },
  "run.superseded_not_repeated": {
    severity: "soft",
    words: (f) => `${devices(f)} of the superseded run were not measured again in the run that replaces it.`,
  },
} as const satisfies Record<string, Kind>;

export type FindingCode = keyof typeof KINDS;

/** Where a finding stands and what it rests on. */
export interface FindingPlace {
  serial?: string | null;
  point?: number | null;
  data?: Facts;
}

/** A finding with its severity and sentence from the table. */
export function makeFinding(code: FindingCode, place: FindingPlace = {}): Finding {
  const { serial = null, point = null, data } = place;
  const { severity, words } = KINDS[code];
  return { code, severity, serial, point, message: words(data ?? {}), ...(data && { data }) };
}
