import { expect, it } from "vitest";
import { poolDeviations } from "@/lib/domain/compensation/pooled-deviation";
import { standardDeviationOf } from "@/lib/domain/compensation/sample-statistics";

it("pools by degrees of freedom, whatever the means", () => {
  const [a, b] = [
    [1, 2, 4],
    [101, 103, 104, 108, 111],
  ] as const;
  const deviation = (values: readonly number[]) => ({ sd: standardDeviationOf(values) as number, n: values.length });
  const about = (values: readonly number[]) => {
    const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
    return values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  };
  const pooled = poolDeviations([deviation(a), deviation(b)]);
  // From the definition: squares about each sample's own mean, over the degrees of freedom of both.
  expect(pooled?.sd).toBeCloseTo(Math.sqrt((about(a) + about(b)) / 6), 12);
  expect(pooled?.freedom).toBe(6);
});

it("has nothing without a degree of freedom", () => {
  expect(poolDeviations([])).toBeNull();
  expect(poolDeviations([{ sd: 0, n: 1 }])).toBeNull();
});
