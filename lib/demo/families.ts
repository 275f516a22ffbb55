/** The demo's two families and how their cells drift. The figures are invented, of a size that such cells have. */
import type { FamilyDocument } from "@/schemas/api/families";
import type { DriftParameters } from "./device-model";

/** Every number of the demo's readings comes from these parameters and this seed. */
export const DEMO_SEED = 20260914;

export interface DemoFamily {
  document: FamilyDocument;
  parameters: DriftParameters;
}

export const benchFamily: DemoFamily = {
  document: {
    code: "MW-20",
    name: "Bending beam 20 kg",
    capacityKg: 20,
    nominalMvV: 2,
    referenceC: 20,
    accuracyClass: "C",
    intervals: 3000,
    vMinRatioY: 10000,
    pLc: 0.7,
    temperatureMinC: 10,
    temperatureMaxC: 40,
    minSoakMinutes: 90,
    minLoadFraction: 0.5,
    minTemperatureSpanK: 20,
    temperatureShare: 0.7,
    coverage: 0.95,
    confidence: 0.95,
  },
  parameters: {
    zeroMvV: [-0.006, 0.012],
    zeroMvVPerK: [-2e-6, 2.6e-5],
    zeroMvVPerK2: [0, 2e-8],
    sensitivity: [-0.001, 0.009],
    sensitivityPerK: [4.18e-4, 1.5e-6],
    sensitivityPerK2: [0, 6e-9],
    countsAtZeroC: [1850, 12],
    countsPerK: [8.06, 0.04],
    noiseMvV: 6e-6,
    noiseCounts: 0.06,
  },
};

export const floorFamily: DemoFamily = {
  document: {
    code: "MW-300",
    name: "Shear beam 300 kg",
    capacityKg: 300,
    nominalMvV: 1.2,
    referenceC: 22,
    accuracyClass: "C",
    intervals: 4000,
    vMinRatioY: 8000,
    pLc: 0.7,
    temperatureMinC: -5,
    temperatureMaxC: 40,
    minSoakMinutes: 120,
    minLoadFraction: 0.5,
    minTemperatureSpanK: 30,
    temperatureShare: 0.7,
    coverage: 0.95,
    confidence: 0.95,
  },
  parameters: {
    zeroMvV: [0.004, 0.015],
    zeroMvVPerK: [3e-6, 2.2e-5],
    zeroMvVPerK2: [1.2e-7, 4e-8],
    sensitivity: [0.002, 0.007],
    sensitivityPerK: [3.9e-4, 1.2e-6],
    sensitivityPerK2: [-9e-7, 6e-9],
    countsAtZeroC: [1790, 14],
    countsPerK: [8.1, 0.05],
    noiseMvV: 4e-6,
    noiseCounts: 0.06,
  },
};
