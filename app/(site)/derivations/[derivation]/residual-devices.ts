import type { FamilyRules } from "@/lib/domain/compensation/types";
import type { DerivationChart } from "@/lib/services/derivations/get-derivation-chart";
import type { ResidualDevice } from "./residual-chart";

/** Residuals of the drawn devices in the units in which they are read: intervals, ppm of the gain, kelvin. */
export function residualDevices({ devices, rules }: DerivationChart, isPooled: boolean): ResidualDevice[] {
  const perInterval = intervalsOf(rules);
  return devices.flatMap(({ serial, role, residuals, gain, freedom }) => {
    if (!residuals) return [];
    const scaled = (values: readonly number[] | null, factor: number) => values?.map((value) => value * factor) ?? null;
    return {
      serial,
      role,
      // With a pooled gainTc only the point that the gain was taken from is met by construction.
      freedom: isPooled ? { ...freedom, gain: Math.max(0, (residuals.gain?.length ?? 0) - 1) } : freedom,
      residuals: {
        zero: scaled(residuals.zero, perInterval),
        gain: gain ? scaled(residuals.gain, 1e6 / gain) : null,
        temperature: scaled(residuals.temperature, 1),
      },
    };
  });
}

function intervalsOf({ intervals, nominalMvV }: FamilyRules): number {
  return intervals / nominalMvV;
}
