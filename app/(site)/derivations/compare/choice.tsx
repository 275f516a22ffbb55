import { Button } from "@/app/_components/button";
import { Select } from "@/app/_components/form/select";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import type { DerivationSummary } from "@/schemas/api/derivations";

export interface ChoiceProps {
  /** Finished ones of the lot, newest first. */
  derivations: readonly DerivationSummary[];
  from: string | undefined;
  to: string | undefined;
}

/** Chooses the two; a plain form, so that the choice stands in the address. */
export function Choice({ derivations, from, to }: ChoiceProps) {
  const options = derivations.map(({ id, createdAt, method, order, state, withValues }) => ({
    value: id,
    name: `${formatDateTime(createdAt)} · ${method}, order ${order}, ${formatNumberOf(withValues, "device")} · ${state.replaceAll("-", " ")}`,
  }));
  return (
    <form action="/derivations/compare" className="grid items-end gap-4 md:grid-cols-[1fr_1fr_auto]">
      <Select key={`from ${from}`} label="From" name="from" defaultValue={from} options={options} />
      <Select key={`to ${to}`} label="To" name="to" defaultValue={to} options={options} />
      <Button type="submit" look="outline">
        Compare
      </Button>
    </form>
  );
}
