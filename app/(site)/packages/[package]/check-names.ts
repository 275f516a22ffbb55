import { words } from "./evidence";

/** What each check looks at, in the words of its heading. */
const names: Record<string, string> = {
  coverage: "Devices packed and left out",
  "decided-sets": "Coefficients approved",
  firmware: "Firmware that understands the layout",
  "reserved-bytes": "Bytes of no field left alone",
  repeatability: "Composed twice, the same bytes",
  outliers: "Values that stand out within the lot",
  "equal-images": "No two devices with the same values",
  "live-difference": "What changes against the live release",
  limits: "Values within the layout's limits",
  "round-trip": "Decoded again, the values put in",
  "hex-reading": "HEX files read by independent readers",
  pooling: "One gain coefficient for the lot",
  verification: "Verification devices",
  "proven-range": "Temperatures proven",
  "first-off": "Written devices compute as predicted",
  twin: "Predicted inside the envelope",
};

/** Heading of a check; one without an entry is named by its code. */
export function checkName(code: string): string {
  const text = names[code] ?? words(code);
  return text.charAt(0).toUpperCase() + text.slice(1);
}
