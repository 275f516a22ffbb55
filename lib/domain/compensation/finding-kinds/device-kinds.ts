import { coefficient, devices, type Kind, outlierTests, ppm, show } from "./words";

/** Findings on one device of a derivation. */
export const DEVICE_KINDS = {
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
    words: (f) => {
      const many = typeof f.devices === "number" && f.devices > 1 ? ` (${devices(f)}, this the furthest)` : "";
      return `Gain ${show(f.gain)} is far from 1${many}: check load, capacity and nominal output.`;
    },
  },
  "sample.trim_missing": {
    severity: "soft",
    words: (f) =>
      `In the sample run, but without loaded readings at ${show(f.needed)} temperatures 5 K apart: it does not enter gainTc.`,
  },
  "coefficient.outlier": {
    severity: "soft",
    words: (f) =>
      `${show(f.coefficient)} ${coefficient(f.coefficient, f.value)} stands out from the other devices' (median ` +
      `${coefficient(f.coefficient, f.median)}; ${outlierTests(f)}): ${show(f.intervals)} v of the output at capacity.`,
  },
  "coefficient.sign_unlike": {
    severity: "soft",
    words: (f) =>
      `gainTc ${ppm(f.gainTc)} has the other sign than ${show(f.alike)} of ${show(f.others)} others (median ` +
      `${ppm(f.median)}): another material, swapped points, or another device.`,
  },
  "thermometer.off_siblings": {
    severity: "soft",
    words: (f) =>
      `${typeof f.fromC === "number" ? `From ${show(f.fromC)} to ${show(f.atC)} °C` : `At ${show(f.atC)} °C`} the device's ` +
      `thermometer reads ${show(f.awayK)} K off its siblings (score ${show(f.score)}, ` +
      `limit ${show(f.threshold)}); were it another device's, that would be ${show(f.intervals)} v.`,
  },
  "verification.in_sample": {
    severity: "note",
    words: () => "In the sample as well as in the verification run: it proves nothing on the rest of the lot.",
  },
  "result.not_finite": {
    severity: "hard",
    words: () => "The readings lead to no usable number.",
  },
} as const satisfies Record<string, Kind>;
