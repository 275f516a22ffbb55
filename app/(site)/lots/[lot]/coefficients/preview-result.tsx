import { FindingsList } from "@/app/_components/findings-list";
import { PooledFacts } from "@/app/_components/pooled-facts";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";
import { Effect } from "./effect";
import type { Previewed } from "./use-preview";

/** What a derivation would give, before anything is stored. */
export function PreviewResult({ preview, against }: Previewed) {
  const { counts, pooled, provenRange, verification } = preview;
  const passed = verification.filter((device) => device.passed).length;
  return (
    <section className="mt-5 border-t border-rule pt-4" aria-label="Preview">
      <h3 className="mb-2 font-semibold">Preview, nothing is stored</h3>
      <p className="mb-3 text-sm text-ink-soft">
        {counts.withValues} of {formatNumberOf(counts.devices, "device")} would get coefficients
        {provenRange
          ? `, proven from ${formatQuantity("temperature", provenRange[0])} to ${formatQuantity("temperature", provenRange[1])} °C`
          : ""}
        {verification.length > 0
          ? `; ${passed} of ${formatNumberOf(verification.length, "verification device")} inside the envelope`
          : ""}
        .
      </p>
      {pooled ? <PooledFacts pooled={pooled} /> : null}
      {against ? <Effect name={against.name} before={against.result} after={preview} /> : null}
      <div className="mt-3">
        <h4 className="mb-1 font-semibold">Findings</h4>
        <FindingsList findings={preview.findings} empty="No findings." />
      </div>
    </section>
  );
}
