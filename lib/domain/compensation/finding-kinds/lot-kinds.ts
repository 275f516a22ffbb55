import { coefficient, devices, type Kind, percent, ppm, show } from "./words";

/** Findings on a derivation as a whole. */
export const LOT_KINDS = {
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
  "coefficient.many_outliers": {
    severity: "soft",
    words: (f) =>
      `${show(f.coefficient)} of ${devices(f)} stands out from the lot's (median ${coefficient(f.coefficient, f.median)}, ` +
      `worst ${coefficient(f.coefficient, f.value)} in ${show(f.worst)}): does the lot mix gauges or materials?`,
  },
  "device.in_two_runs": {
    severity: "note",
    words: (f) =>
      `In a ${show(f.used)} and in a ${show(f.other)} run (${devices(f)}): thermometer and zero come from the ${show(f.used)} ` +
      "run alone.",
  },
} as const satisfies Record<string, Kind>;
