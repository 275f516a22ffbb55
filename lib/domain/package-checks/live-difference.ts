import { formatCount, formatFigure, formatNumberOf, formatPercent } from "@/lib/domain/format/figure";
import { devices, type PackageCheck, serialEvidence, someSerials } from "./check";
import type { CheckThresholds } from "./thresholds";

/** What became of one field in the devices that both packages hold. */
export interface FieldMoves {
  name: string;
  unit: string | null;
  /** Devices whose value differs. */
  devices: number;
  /** The change of largest magnitude; null where it is no number. */
  largest: { serial: string; from: number; to: number; steps: number | null } | null;
  /** Room between the layout's limits, in the field's unit; null where it does not name both. */
  room: number | null;
  /** Serials whose value changed its sign. */
  signFlips: readonly string[];
  /** Whether the sign means something by itself: gains and their temperature coefficients. */
  signMatters: boolean;
}

export interface LiveDifferenceFacts {
  /** The package that is live for the lot; null where none is. */
  live: { id: string; version: string; digest: string } | null;
  packed: number;
  added: number;
  removed: number;
  /** Devices in both that differ in values, and in version numbers only. */
  values: number;
  versionOnly: number;
  same: number;
  fields: readonly FieldMoves[];
  thresholds: Pick<CheckThresholds, "differenceShareWarn" | "differenceStepWarn" | "signFlipsWarn">;
}

/** Whether the package changes more against what is live than the family lets pass unseen. */
export function checkLiveDifference(facts: LiveDifferenceFacts): PackageCheck {
  const { live, packed, fields, thresholds } = facts;
  if (!live)
    return {
      code: "live-difference",
      verdict: "pass",
      message: "Nothing is live for the lot: there is nothing to differ from.",
      evidence: { live: null, devices: packed, thresholds },
    };
  const both = facts.values + facts.versionOnly + facts.same;
  const share = both > 0 ? facts.values / both : 0;
  const steps = fields.flatMap(stepOf).sort((a, b) => b.share - a.share);
  const flips = fields.filter((field) => field.signMatters && field.signFlips.length > 0);
  const flipped = new Set(flips.flatMap((field) => field.signFlips));
  const warnings = [
    ...(share > thresholds.differenceShareWarn
      ? [`More than ${formatPercent(thresholds.differenceShareWarn, 1)} of the devices change.`]
      : []),
    ...steps
      .filter((step) => step.share > thresholds.differenceStepWarn)
      .slice(0, 1)
      .map(stepSentence),
    ...(flipped.size > thresholds.signFlipsWarn
      ? [
          `The sign of ${flips.map((field) => field.name).join(", ")} changes in ${devices(flipped.size)} (${someSerials([...flipped])}).`,
        ]
      : []),
  ];
  return {
    code: "live-difference",
    verdict: warnings.length > 0 ? "warn" : "pass",
    message: [overview(facts, both), ...warnings].join(" "),
    evidence: {
      live,
      devices: packed,
      both,
      values: facts.values,
      versionOnly: facts.versionOnly,
      same: facts.same,
      added: facts.added,
      removed: facts.removed,
      share,
      thresholds,
      fields: fields.map(({ signFlips, room, ...field }) => ({
        ...field,
        shareOfRoom: stepOf({ ...field, signFlips, room })[0]?.share ?? null,
        signFlips: serialEvidence(signFlips),
      })),
    },
  };
}

function overview({ live, values, versionOnly, added, removed, fields }: LiveDifferenceFacts, both: number): string {
  const parts = [
    `Against ${live?.version}, live when this was built: ${formatCount(values)} of ${devices(both)} change values`,
  ];
  const changed = fields.filter((field) => field.devices > 0).length;
  if (values > 0) parts.push(`in ${formatNumberOf(changed, "field")}`);
  const more = [
    ...(versionOnly > 0 ? [`${formatCount(versionOnly)} version numbers only`] : []),
    ...(added > 0 ? [`${formatCount(added)} added`] : []),
    ...(removed > 0 ? [`${formatCount(removed)} gone`] : []),
  ];
  return `${parts.join(" ")}${more.length > 0 ? `; ${more.join(", ")}` : ""}.`;
}

interface Step {
  name: string;
  serial: string;
  share: number;
}

function stepOf({ name, largest, room }: Pick<FieldMoves, "name" | "largest" | "room" | "signFlips">): Step[] {
  if (!largest || room === null || room <= 0) return [];
  return [{ name, serial: largest.serial, share: Math.abs(largest.to - largest.from) / room }];
}

const stepSentence = ({ name, serial, share }: Step) =>
  `${name} of ${serial} changes by ${formatFigure(share * 100, { digits: 1 })} % of the room between its limits.`;
