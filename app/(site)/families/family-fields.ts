import type { FamilyDocument } from "@/schemas/api/families";

export interface FamilyField {
  name: Exclude<keyof FamilyDocument, "code" | "name" | "accuracyClass">;
  label: string;
  unit?: string;
  help: string;
}

export interface FamilyFieldGroup {
  title: string;
  fields: readonly FamilyField[];
}

/** A family's numbers with unit and one line each that says what they are for; form and page are drawn from it. */
export const familyFieldGroups: readonly FamilyFieldGroup[] = [
  {
    title: "Cell",
    fields: [
      {
        name: "capacityKg",
        label: "Rated capacity",
        unit: "kg",
        help: "Emax of the cell; loads and output are scaled to it.",
      },
      { name: "nominalMvV", label: "Nominal output", unit: "mV/V", help: "Corrected output at capacity." },
      {
        name: "referenceC",
        label: "Reference temperature",
        unit: "°C",
        help: "Where zero and gain are stated; drift is counted from here.",
      },
      {
        name: "temperatureMinC",
        label: "Lowest temperature",
        unit: "°C",
        help: "Of the range that the cell is sold for.",
      },
      {
        name: "temperatureMaxC",
        label: "Highest temperature",
        unit: "°C",
        help: "Of the range that the cell is sold for.",
      },
    ],
  },
  {
    title: "Accuracy",
    fields: [
      {
        name: "intervals",
        label: "Verification intervals n",
        help: "Class A from 50,000, B 5,000 to 100,000, C 500 to 10,000, D 100 to 1,000 (OIML R 60-1, table 1).",
      },
      {
        name: "vMinRatioY",
        label: "Ratio Y",
        help: "Capacity over the smallest verification interval; limits the drift of zero.",
      },
      {
        name: "pLc",
        label: "Fraction p_LC",
        help: "Share of the instrument's error given to the cell, 0.3 to 0.8; 0.7 is usual.",
      },
    ],
  },
  {
    title: "Temperature test",
    fields: [
      {
        name: "minSoakMinutes",
        label: "Least soak",
        unit: "min",
        help: "Counted from when the chamber stayed within 0.5 K.",
      },
      { name: "minLoadFraction", label: "Least load", help: "Of a loaded reading, as a fraction of capacity, 0 to 1." },
      {
        name: "minTemperatureSpanK",
        label: "Least span of temperatures",
        unit: "K",
        help: "Between the lowest and the highest of a run.",
      },
    ],
  },
  {
    title: "Pooled gain",
    fields: [
      {
        name: "temperatureShare",
        label: "Share for temperature",
        help: "Of the error envelope, 0 to 1; the rest is left to linearity, hysteresis and creep.",
      },
      {
        name: "coverage",
        label: "Coverage",
        help: "Share of the lot that the tolerance interval has to cover, as 0.95.",
      },
      { name: "confidence", label: "Confidence", help: "Of the tolerance and the confidence interval, as 0.95." },
    ],
  },
];

export const accuracyClasses = ["A", "B", "C", "D"] as const;
