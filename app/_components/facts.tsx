import type { ReactNode } from "react";

export interface Fact {
  value: ReactNode;
  label: ReactNode;
}

/** Big figures, each with what it counts under it. `small` sets the label above and the value in figures. */
export function Facts({ facts, small = false }: { facts: readonly Fact[]; small?: boolean }) {
  return (
    <dl className="flex flex-wrap gap-x-[34px] gap-y-3">
      {facts.map((fact, index) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: facts are a fixed row, labels may be any node
        <div key={index} className={`flex ${small ? "flex-col" : "flex-col-reverse"}`}>
          <dt className="text-xs text-ink-soft">{fact.label}</dt>
          <dd className={small ? "font-mono" : "text-lg leading-tight font-[650]"}>{fact.value}</dd>
        </div>
      ))}
    </dl>
  );
}
