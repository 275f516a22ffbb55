/** What a run may be for, as people choose it. */
export const PURPOSES = [
  { value: "sample", name: "Sample: loaded and unloaded at each temperature, feeds gain and zero" },
  { value: "zero", name: "Zero: unloaded only" },
  { value: "span", name: "Span: unloaded and loaded near the reference temperature, feeds gain only" },
  { value: "verification", name: "Verification: as sample, never feeds the lot's gain coefficient" },
  { value: "proof", name: "Proof: compensated output of written devices" },
] as const;
