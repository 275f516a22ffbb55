import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Notice } from "@/app/_components/notice";
import { StateMark, ToneShape } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { toneText } from "@/app/_components/state/tone";
import { formatAddress } from "@/lib/domain/format/digest";
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
  bytes: DumpResult["differences"];
}

/** Differing bytes gathered by the field they belong to, in the order of the memory. */
function byField(differences: DumpResult["differences"]): FieldDifference[] {
  const groups: FieldDifference[] = [];
  for (const one of differences) {
    const last = groups.at(-1);
    const { field, expectedValue, actualValue } = one;
    if (last && last.field === field && field !== null) last.bytes.push(one);
    else groups.push({ field, expectedValue, actualValue, bytes: [one] });
  }
  return groups;
}

/** What is shown at most; a dump of another memory differs nearly everywhere. */
const SHOWN_MAX = 60;

function Differences({ fields }: { fields: readonly FieldDifference[] }) {
  return (
    <div className="mt-4 overflow-x-auto">
      <table className="w-full text-sm">
        <caption className="sr-only">Differences by field and byte</caption>
        <thead>
          <tr className="text-left text-xs text-ink-soft">
            {["Field", "Should be", "Is", "Bytes: at, should be → is"].map((head) => (
              <th key={head} scope="col" className="py-1 pr-4 font-semibold">
                {head}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {fields.slice(0, SHOWN_MAX).map((group) => (
            <tr key={`${group.field}${group.bytes[0]?.at}`} className="border-t border-rule/55 align-top">
              <th scope="row" className="py-1.5 pr-4 text-left font-semibold">
                {group.field ?? <span className="font-normal text-ink-soft">unused memory</span>}
              </th>
              <td className="py-1.5 pr-4 font-mono">{valueText(group.expectedValue)}</td>
              <td className="py-1.5 pr-4 font-mono text-oxide">{valueText(group.actualValue)}</td>
              <td className="py-1.5 font-mono text-xs">
                {group.bytes.map(({ at, expected, actual }) => (
                  <span key={at} className="mr-3 inline-block whitespace-nowrap">
                    <span className="text-ink-soft">{formatAddress(at)}</span> {expected.toUpperCase()} →{" "}
                    {actual.toUpperCase()}
                  </span>
                ))}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
      {fields.length > SHOWN_MAX ? (
        <p className="mt-2 text-sm text-ink-soft">
          {fields.length - SHOWN_MAX} more differences are not shown: this is another memory altogether.
        </p>
      ) : null}
    </div>
  );
}

function valueText(value: number | string | null): string {
  if (value === null) return "—";
  return typeof value === "number" ? String(Number(value.toPrecision(9))).replace("-", "−") : value;
}
