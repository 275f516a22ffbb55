import { AppError } from "@/lib/errors";
import type { Fit } from "./fit";

/** What a fit says at one x. */
export interface FitPrediction {
  value: number;
  /** Standard error of the fitted curve there; null without a degree of freedom. */
  standardError: number | null;
  /** The same for a single new measurement: its own scatter added. */
  newStandardError: number | null;
}

/**
 * Value of the fit at x, with its standard error √(vᵀ·C·v): v the powers of x − x0 and C their covariance. About the mean
 * of x nothing cancels, where powers of x itself would lose their digits for a mean far from 0.
 * Source: NIST/SEMATECH e-Handbook of Statistical Methods, 4.5.1 (predicted values and their uncertainty).
 * @param x finite, in the unit of the fit's x. Outside the points it is an extrapolation: the error knows nothing of it.
 * @throws AppError `fit.x_invalid` {x}, also where the value is beyond a double.
 */
export function predictFit(fit: Fit, x: number): FitPrediction {
  const { x0, coefficients, covariance } = fit.centred;
  const powers = coefficients.map((_, i) => (x - x0) ** i);
  const value = powers.reduce((sum, power, i) => sum + power * (coefficients[i] as number), 0);
  let variance = 0;
  for (const [i, row] of (covariance ?? []).entries())
    for (const [k, entry] of row.entries()) variance += entry * (powers[i] as number) * (powers[k] as number);
  if (!Number.isFinite(value) || !Number.isFinite(variance)) throw new AppError("fit.x_invalid", { x });
  if (!covariance || fit.residualSd === null) return { value, standardError: null, newStandardError: null };
  const standardError = Math.sqrt(Math.max(0, variance));
  return { value, standardError, newStandardError: Math.hypot(standardError, fit.residualSd) };
}
