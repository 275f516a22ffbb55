import { words } from "./evidence";

/** What each check looks at, in the words of its heading. */
const names: Record<string, string> = {
  coverage: "Devices packed and left out",
  limits: "Values within the layout's limits",
  "round-trip": "Decoded again, the values put in",
  "hex-reading": "HEX files read by an independent reader",
  pooling: "One gain coefficient for the lot",
  verification: "Verification devices",
  "proven-range": "Temperatures proven",
  twin: "Predicted inside the envelope",
};

/** Heading of a check; one without an entry is named by its code. */
export function checkName(code: string): string {
  const text = names[code] ?? words(code);
  return text.charAt(0).toUpperCase() + text.slice(1);
}
