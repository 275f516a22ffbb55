/** How a series is drawn. */
export type SeriesTone = "ink" | "copper" | "verdigris" | "slate" | "ochre" | "oxide";

export const strokeOf: Record<SeriesTone, string> = {
  ink: "stroke-ink",
  copper: "stroke-copper",
  verdigris: "stroke-verdigris",
  slate: "stroke-slate",
  ochre: "stroke-ochre",
  oxide: "stroke-oxide",
};

export const fillOf: Record<SeriesTone, string> = {
  ink: "fill-ink",
  copper: "fill-copper",
  verdigris: "fill-verdigris",
  slate: "fill-slate",
  ochre: "fill-ochre",
  oxide: "fill-oxide",
};

export interface LegendEntry {
  name: string;
  tone: SeriesTone;
  shape: "line" | "dashed" | "dot" | "ring" | "band" | "area" | "bar";
}

/** Names of what is drawn, each with its own drawing. */
export function Legend({ entries }: { entries: readonly LegendEntry[] }) {
  return (
    <ul className="flex flex-wrap gap-x-5 gap-y-1 pl-[54px] text-xs text-ink-soft">
      {entries.map((entry) => (
        <li key={entry.name} className="flex items-center gap-2">
          <svg width="22" height="12" viewBox="0 0 22 12" aria-hidden="true">
            {drawingOf(entry)}
          </svg>
          {entry.name}
        </li>
      ))}
    </ul>
  );
}

function drawingOf({ tone, shape }: LegendEntry) {
  const stroke = strokeOf[tone];
  if (shape === "dot") return <circle cx="11" cy="6" r="4.5" className={fillOf[tone]} />;
  if (shape === "ring") return <circle cx="11" cy="6" r="4.2" fill="none" strokeWidth="1.6" className={stroke} />;
  if (shape === "band")
    return <rect x="1" y="1" width="20" height="10" fillOpacity="0.12" className={`${fillOf[tone]} ${stroke}`} />;
  if (shape === "area") return <rect x="1" y="1" width="20" height="10" fillOpacity="0.2" className={fillOf[tone]} />;
  if (shape === "bar") return <path d="M1 6H21M1 2V10M21 2V10" fill="none" strokeWidth="1.8" className={stroke} />;
  return (
    <path d="M1 6H21" strokeWidth="1.6" strokeDasharray={shape === "dashed" ? "4 3" : undefined} className={stroke} />
  );
}
