import { type CheckThresholds, DEFAULT_THRESHOLDS } from "@/lib/domain/package-checks/thresholds";
import type { FamilyDocument } from "@/schemas/api/families";

export interface FamilyField {
  name: Exclude<keyof FamilyDocument, "code" | "name" | "accuracyClass" | "checks">;
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

export interface ThresholdField {
  name: keyof CheckThresholds;
  label: string;
  unit?: string;
  help: string;
}

const unless = (name: keyof CheckThresholds) => `${DEFAULT_THRESHOLDS[name]} where left empty.`;

/** From when on the checks of this family's packages warn. */
export const thresholdFields: readonly ThresholdField[] = [
  {
    name: "outlierScore",
    label: "Values that stand out",
    help: `Distance from the lot's median in robust standard deviations; ${unless("outlierScore")}`,
  },
  {
    name: "differenceShareWarn",
    label: "Share of devices changed",
    help: `Against what is live, 0 to 1; 1 never warns. ${unless("differenceShareWarn")}`,
  },
  {
    name: "differenceStepWarn",
    label: "Largest change of a value",
    help: `Against what is live, as a share of the room between the layout's limits, 0 to 1; ${unless("differenceStepWarn")}`,
  },
  {
    name: "signFlipsWarn",
    label: "Changes of sign",
    unit: "devices",
    help: `Of a gain or its temperature coefficient against what is live; ${unless("signFlipsWarn")}`,
  },
];

export const accuracyClasses = ["A", "B", "C", "D"] as const;
