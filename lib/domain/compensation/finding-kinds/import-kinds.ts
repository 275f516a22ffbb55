import { devices, type Kind, ppm, show, signTrap } from "./words";

/** Findings on values that were found elsewhere. */
export const IMPORT_KINDS = {
  "import.not_measured": {
    severity: "note",
    words: () => "Imported values: no readings of this lot stand behind them, and nothing is said on their errors.",
  },
  "import.sign_opposite": {
    severity: "soft",
    words: (f) =>
      `${show(f.coefficient)} has the other sign than what was derived from readings in ${show(f.opposite)} of ` +
      `${show(f.compared)} devices. ${signTrap(f.coefficient)}`,
  },
  "import.sign_unusual": {
    severity: "note",
    words: (f) =>
      `gainTc is positive in ${show(f.positive)} of ${show(f.compared)} devices. Most cells grow more sensitive with ` +
      `temperature, which a negative gainTc corrects. ${signTrap("gainTc")}`,
  },
  "import.unit_suspect": {
    severity: "soft",
    words: (f) =>
      `${show(f.coefficient)} ${show(f.value)} would change the output by ${show(f.percent)} % over the family's range ` +
      `(${devices(f)}): gainTc is in 1/K and zeroTc in mV/V/K, not in ppm or % in 10 K.`,
  },
  "import.beyond_limit": {
    severity: "soft",
    words: (f) =>
      `gainTc ${ppm(f.gainTc)} is further from the ${ppm(f.mean)} derived from the lot's sample than the pooling limit of ` +
      `±${ppm(f.limit)} (${devices(f)}).`,
  },
} as const satisfies Record<string, Kind>;
