import { firmwareSpans, runsOf } from "@/lib/domain/firmware-spans";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { LayoutSummary } from "@/lib/services/layouts/get-layout";

interface LayoutTimelineProps {
  layouts: readonly LayoutSummary[];
  lots: readonly { code: string; firmware: string }[];
}

const looks: Record<LayoutSummary["state"], string> = {
  published: "border-verdigris bg-(--field-zero)",
  draft: "border-slate border-dashed bg-(--field-identity)",
  "in-review": "border-ochre border-dashed bg-(--field-temperature)",
  retired: "border-ink-faint hatched",
};

/** Versions down, firmware across: a bar where a layout's firmware lies, and under it the lots with that firmware. */
export function LayoutTimeline({ layouts, lots }: LayoutTimelineProps) {
  const { stops, covers } = firmwareSpans(
    layouts.map((layout) => layout.firmware),
    lots.map((lot) => lot.firmware),
  );
  const columns = { gridTemplateColumns: `72px repeat(${Math.max(stops.length, 1)}, minmax(64px, 1fr))` };
  return (
    <div className="overflow-x-auto">
      <div className="min-w-max text-sm" role="img" aria-label={describe(layouts)}>
        <div aria-hidden="true" className="grid border-b border-rule font-mono text-xs text-ink-soft" style={columns}>
          <span className="py-1">Layout</span>
          {stops.map((stop) => (
            <span key={stop} className="border-l border-rule py-1 pl-1">
              {stop}
            </span>
          ))}
        </div>
        {layouts.map((layout, i) => (
          <div key={layout.id} className="grid items-center border-b border-rule/55" style={columns}>
            <span className="py-2 font-mono">{layout.version}</span>
            {runsOf(covers[i] ?? []).map(([from, to]) => (
              <span
                key={from}
                aria-hidden="true"
                title={`${layout.version}: ${layout.firmware}`}
                style={{ gridColumn: `${from + 2} / ${to + 3}`, gridRow: 1 }}
                className={`mr-px truncate rounded-xs border px-2 py-0.5 text-xs ${looks[layout.state]}`}
              >
                {layout.state.replace("-", " ")}
              </span>
            ))}
          </div>
        ))}
        <LotsLine stops={stops} lots={lots} columns={columns} />
      </div>
    </div>
  );
}

/** How many lots have which firmware. */
function LotsLine({ stops, lots, columns }: Pick<LayoutTimelineProps, "lots"> & { stops: string[]; columns: object }) {
  return (
    <div aria-hidden="true" className="grid pt-1 text-xs text-ink-soft" style={columns}>
      <span className="py-1">Lots</span>
      {stops.map((stop) => {
        const here = lots.filter((lot) => lot.firmware === stop);
        return (
          <span key={stop} title={here.map((lot) => lot.code).join(", ")} className="border-l border-rule py-1 pl-1">
            {here.length === 0 ? "" : formatNumberOf(here.length, "lot")}
          </span>
        );
      })}
    </div>
  );
}

const describe = (layouts: readonly LayoutSummary[]) =>
  `Firmware of ${layouts.map((layout) => `layout ${layout.version}: ${layout.firmware}`).join("; ")}. The table beside it says the same.`;
