import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Notice } from "@/app/_components/notice";
import { StateMark, ToneShape } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { toneText } from "@/app/_components/state/tone";
import { formatAddress } from "@/lib/domain/format/digest";
import { formatFieldChange } from "@/lib/domain/format/field-value";
import type { DumpResult } from "@/schemas/api/devices";

const TITLES: Record<DumpResult["match"], string> = {
  exact: "Equal to the image",
  differs: "Differs from the image",
  "other-serial": "Names another serial",
  unknown: "Not known here",
};

/** Result of a dump check. `asked` is the serial it was checked for, where there was one. */
export function DumpFindings({ result, asked }: { result: DumpResult; asked?: string }) {
  const { match } = result;
  const state = stateOf("dump", match);
  const fields = byField(result.differences);
  return (
    <Card
      look={match === "exact" ? (result.live ? "sealed" : "caution") : match === "unknown" ? "caution" : "bad"}
      title={
        <span className={`flex items-center gap-2 ${toneText[state.tone]}`}>
          <ToneShape tone={state.tone} shape={state.shape} size={14} />
          {TITLES[match]}
        </span>
      }
    >
      <dl className="flex flex-wrap gap-x-8 gap-y-2 text-sm">
        {result.serial ? (
          <div>
            <dt className="text-xs text-ink-soft">{match === "other-serial" ? "serial in the memory" : "serial"}</dt>
            <dd className="font-mono">
              {result.serial === asked ? result.serial : <Link href={`/trace/${result.serial}`}>{result.serial}</Link>}
            </dd>
          </div>
        ) : null}
        {result.version ? (
          <div>
            <dt className="text-xs text-ink-soft">compared with</dt>
            <dd>
              package {result.version}, {result.live ? "live" : "not live"}
            </dd>
          </div>
        ) : null}
        {result.checksums.length > 0 ? (
          <div>
            <dt className="text-xs text-ink-soft">checksums inside</dt>
            <dd className="flex flex-wrap gap-x-4">
              {result.checksums.map(({ name, ok }) => (
                <StateMark key={name} tone={ok ? "good" : "bad"} word={`${name} ${ok ? "right" : "wrong"}`} />
              ))}
            </dd>
          </div>
        ) : null}
      </dl>
      {fields.length > 0 ? <Differences fields={fields} /> : null}
      <div className="mt-3">
        <Notice tone={match === "exact" && result.live ? "good" : "caution"} title="What to do">
          {result.advice}
        </Notice>
      </div>
    </Card>
  );
}

interface FieldDifference {
  field: string | null;
  expectedValue: number | string | null;
  actualValue: number | string | null;
  unit: string | null;
  bytes: DumpResult["differences"];
}

/** Differing bytes gathered by the field they belong to, in the order of the memory. */
function byField(differences: DumpResult["differences"]): FieldDifference[] {
  const groups: FieldDifference[] = [];
  for (const one of differences) {
    const last = groups.at(-1);
    const { field, expectedValue, actualValue, unit } = one;
    if (last && last.field === field) last.bytes.push(one);
    else groups.push({ field, expectedValue, actualValue, unit, bytes: [one] });
  }
  return groups;
}

/** Bytes of one field, or of unused memory, shown at most; a dump of another memory differs nearly everywhere. */
const BYTES_SHOWN_MAX = 32;

function Differences({ fields }: { fields: readonly FieldDifference[] }) {
  return (
    <ul className="mt-4 border-t border-rule/55 text-sm" aria-label="Differences by field and byte">
      {fields.map((group) => {
        const left = group.bytes.length - BYTES_SHOWN_MAX;
        return (
          <li key={`${group.field}${group.bytes[0]?.at}`} className="border-b border-rule/55 py-2">
            <div className="flex flex-wrap items-baseline gap-x-4">
              <span className="font-semibold">{group.field ?? "unused memory"}</span>
              {group.expectedValue === null && group.actualValue === null ? null : <Values {...group} />}
            </div>
            <div className="mt-0.5 flex flex-wrap gap-x-3 font-mono text-xs">
              {group.bytes.slice(0, BYTES_SHOWN_MAX).map(({ at, expected, actual }) => (
                <span key={at} className="whitespace-nowrap">
                  <span className="text-ink-soft">{formatAddress(at)}</span> {expected.toUpperCase()} →{" "}
                  <span className="text-oxide">{actual.toUpperCase()}</span>
                </span>
              ))}
              {left > 0 ? <span className="text-ink-soft">and {left} more bytes</span> : null}
            </div>
          </li>
        );
      })}
    </ul>
  );
}

/** What should be there, and what is. */
function Values({ expectedValue, actualValue, unit }: FieldDifference) {
  const {
    from,
    to,
    unit: shown,
    step,
  } = formatFieldChange({ from: expectedValue, to: actualValue, unit, steps: null });
  return (
    <span className="min-w-0 font-mono wrap-anywhere">
      {from ?? "none"} → <span className="text-oxide">{to ?? "none"}</span>
      <span className="font-sans text-ink-soft">
        {shown ? ` ${shown}` : ""}
        {step ? `, off by ${step}` : ""}
      </span>
    </span>
  );
}
