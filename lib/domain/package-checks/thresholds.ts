/** From when on a check of a family's packages warns; what a revision leaves out has its default. */
export interface CheckThresholds {
  /**
   * Distance of a value from the lot's median, in robust standard deviations (1.4826 times the median absolute deviation),
   * beyond which it stands out.
   */
  outlierScore: number;
  /** Share of the devices whose values differ from the live ones, 0…1; 1 never warns. */
  differenceShareWarn: number;
  /** Largest change of a value against the live one as a share of the room between the layout's limits, 0…1. */
  differenceStepWarn: number;
  /** Devices in which a gain or temperature coefficient changes its sign against the live value: more than so many. */
  signFlipsWarn: number;
}

/**
 * A value eight robust deviations out is no member of a normal lot of any size that is built here; a lot derived anew changes
 * every device by little (common practice, no source).
 */
export const DEFAULT_THRESHOLDS: Readonly<CheckThresholds> = {
  outlierScore: 8,
  differenceShareWarn: 1,
  differenceStepWarn: 0.1,
  signFlipsWarn: 0,
};

/** The thresholds of a family revision. */
export function thresholdsOf(family: {
  checks?: { [K in keyof CheckThresholds]?: number | undefined } | undefined;
}): CheckThresholds {
  const given = Object.entries(family.checks ?? {}).filter(([, value]) => value !== undefined);
  return { ...DEFAULT_THRESHOLDS, ...Object.fromEntries(given) };
}
