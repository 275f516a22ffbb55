import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { fitLine, fitQuadratic } from "@/lib/domain/compensation/fit";
import { predictFit } from "@/lib/domain/compensation/predict-fit";

const degenerate = expect.objectContaining({ code: "fit.degenerate" });

describe("fits without a point to spare", () => {
  it("have no certainty to offer, rather than a certainty of 0", () => {
    for (const fit of [fitLine([10, 40], [1, 2]), fitQuadratic([10, 20, 40], [1, 2, 5])]) {
      expect(fit).toMatchObject({ degreesOfFreedom: 0, residualSd: null, standardErrors: null, covariance: null });
      expect(predictFit(fit, 25)).toMatchObject({ standardError: null, newStandardError: null });
      for (const residual of fit.residuals) expect(Math.abs(residual)).toBeLessThan(1e-14);
    }
  });
});

describe("fits that the points do not fix", () => {
  it.each([
    [[1], [1]],
    [[], []],
    [
      [2, 2, 2],
      [1, 2, 3],
    ],
    [
      [1, 2],
      [1, Number.NaN],
    ],
    [
      [1, Number.POSITIVE_INFINITY],
      [1, 2],
    ],
    [
      [1e200, 2e200],
      [1, 2],
    ],
    [
      [1, 2, 3],
      [1, 2],
    ],
  ])("refuses a line through x %j, y %j", (x, y) => {
    expect(() => fitLine(x, y)).toThrow(degenerate);
  });

  it("refuses a parabola through two temperatures, however often", () => {
    expect(() => fitQuadratic([10, 10, 40, 40], [1, 2, 3, 4])).toThrow(degenerate);
  });
});

describe("prediction of a fit", () => {
  const x = [10, 12, 25, 33, 40];
  const y = [1.02, 1.13, 1.71, 2.1, 2.38];

  it("gives back the fitted values", () => {
    for (const fit of [fitLine(x, y), fitQuadratic(x, y)])
      x.forEach((value, i) => {
        expect(predictFit(fit, value).value).toBeCloseTo((y[i] as number) - (fit.residuals[i] as number), 13);
      });
  });

  /** The hat matrix has the number of coefficients as its trace: any text on regression. */
  it("spreads as many variances over the points as there are coefficients", () => {
    for (const fit of [fitLine(x, y), fitQuadratic(x, y)]) {
      const squares = x.reduce((sum, value) => sum + (predictFit(fit, value).standardError as number) ** 2, 0);
      expect(squares / (fit.residualSd as number) ** 2).toBeCloseTo(fit.coefficients.length, 10);
    }
  });

  it("has the error s·√(1/n + (x − mean)²/Sxx) for a line, and that of a single value on top", () => {
    const fit = fitLine(x, y);
    const mean = 24;
    const sxx = x.reduce((sum, value) => sum + (value - mean) ** 2, 0);
    const s = fit.residualSd as number;
    for (const at of [-10, 24, 60]) {
      const error = s * Math.sqrt(1 / 5 + (at - mean) ** 2 / sxx);
      expect(predictFit(fit, at).standardError).toBeCloseTo(error, 13);
      expect(predictFit(fit, at).newStandardError).toBeCloseTo(Math.sqrt(error * error + s * s), 13);
    }
    expect(predictFit(fit, 0).standardError).toBeCloseTo(fit.standardErrors?.[0] as number, 13);
  });

  it("does not lose its digits far from zero, where powers of x do", () => {
    const far = 1e6;
    for (const make of [fitLine, fitQuadratic]) {
      const [near, away] = [
        make(x, y),
        make(
          x.map((value) => value + far),
          y,
        ),
      ];
      for (const at of [5, 24, 50]) {
        const [here, there] = [predictFit(near, at), predictFit(away, at + far)];
        expect(there.value).toBeCloseTo(here.value, 9);
        expect(there.standardError).toBeCloseTo(here.standardError as number, 9);
      }
    }
  });

  it("refuses an x that is not a number", () => {
    expect(() => predictFit(fitLine(x, y), Number.NaN)).toThrow(expect.objectContaining({ code: "fit.x_invalid" }));
  });

  it("gives a covariance whose diagonal the standard errors are the roots of, symmetric, about x0 too", () => {
    const value = fc.double({ min: -1000, max: 1000, noNaN: true });
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: -50, max: 90 }), value), { minLength: 4, maxLength: 12 }),
        (points) => {
          fc.pre(new Set(points.map(([at]) => at)).size > 2);
          const [xs, ys] = [points.map(([at]) => at), points.map(([, signal]) => signal)];
          for (const fit of [fitLine(xs, ys), fitQuadratic(xs, ys)]) {
            if (!fit.covariance) continue;
            for (const matrix of [fit.covariance, fit.centred.covariance as number[][]])
              matrix.forEach((row, i) => {
                row.forEach((entry, k) => {
                  expect(entry).toBe(matrix[k]?.[i]);
                });
              });
            fit.covariance.forEach((row, i) => {
              expect(fit.standardErrors?.[i]).toBe(Math.sqrt(row[i] as number));
            });
          }
        },
      ),
    );
  });
});
