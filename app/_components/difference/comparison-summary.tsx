"use client";

import { Button } from "@/app/_components/button";
import { changedParameters } from "@/app/_components/difference/compared-fields";
import { ComparisonFacts } from "@/app/_components/difference/comparison-facts";
import { StepCharts } from "@/app/_components/difference/step-charts";
import { useComparison } from "@/app/_components/difference/use-comparison";
import { Notice } from "@/app/_components/notice";
import type { LayoutDocument } from "@/schemas/documents/layout";

export interface ComparisonSummaryProps {
  /** Ids of the older and the newer package. */
  from: string;
  to: string;
  /** Layout of the newer one. */
  layout: LayoutDocument;
  charts?: boolean;
}

/** What differs between two packages in figures, and how each parameter's change is distributed. */
export function ComparisonSummary({ from, to, layout, charts = true }: ComparisonSummaryProps) {
  const { data, error, refetch } = useComparison(from, to);
  if (error) {
    return (
      <Notice tone="bad" title="The packages could not be compared">
        {error.message} <Button onClick={() => void refetch()}>Try again</Button>
      </Notice>
    );
  }
  if (!data) {
    return (
      <p role="status" className="text-sm text-ink-soft">
        Counting what differs over all serials
      </p>
    );
  }
  const parameters = changedParameters(data.fields, layout);
  const histograms = new Map(data.fields.map((field) => [field.name, field]));
  const drawn = parameters.flatMap((field) => {
    const known = histograms.get(field.name);
    return known ? [{ ...known, scale: field.scale }] : [];
  });
  return (
    <>
      <ComparisonFacts counts={data.counts} fields={parameters} />
      {charts && drawn.some((field) => field.histogram) ? (
        <details className="mt-3" open={drawn.length <= 2}>
          <summary className="cursor-pointer text-sm font-semibold">How the changes are distributed</summary>
          <StepCharts fields={drawn} />
        </details>
      ) : null}
    </>
  );
}
