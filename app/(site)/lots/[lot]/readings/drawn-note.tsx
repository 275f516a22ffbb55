import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import type { SampleDrawView } from "@/schemas/api/sample-draws";

const REASONS = {
  held: "held",
  scrapped: "scrapped",
  shipped: "shipped",
  measured: "measured before",
  planned: "planned already",
};

/** How a sample was drawn: from how many, by which batches, what was left out, and the seed. */
export function DrawnNote({ draw, changed = false }: { draw: SampleDrawView; changed?: boolean }) {
  const left = draw.leftOut.map(({ reason, count }) => `${formatCount(count)} ${REASONS[reason]}`);
  const batches = draw.strata.filter((one) => one.gaugeBatch !== null || one.materialBatch !== null);
  return (
    <div className="text-sm" role="status">
      <p>
        Drawn {draw.count} of {formatNumberOf(draw.eligible, "device")}
        {left.length > 0 ? `; left out: ${left.join(", ")}` : ""}.
      </p>
      {batches.length > 0 ? (
        <ul className="mt-1 flex flex-wrap gap-x-4">
          {draw.strata.map((one) => (
            <li key={`${one.gaugeBatch} ${one.materialBatch}`}>
              <span className="font-mono">
                {one.gaugeBatch ?? "no gauge batch"}, {one.materialBatch ?? "no material batch"}
              </span>
              : {one.drawn} of {formatCount(one.devices)}
            </li>
          ))}
        </ul>
      ) : null}
      <p className="mt-1 text-xs break-all text-ink-soft">
        Seed <span className="font-mono">{draw.seed}</span>
      </p>
      {changed ? (
        <p className="mt-1 font-medium text-ochre">
          The serials were changed after the draw: the plan will not call them drawn at random.
        </p>
      ) : null}
    </div>
  );
}
