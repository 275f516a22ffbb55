import semver from "semver";
import type { LintOptions } from "@/builders/codec/lint/lint";
import { addChecksum, computeEarlier, coverField, shortenRange, swapEnds } from "@/builders/codec/mend/mend-checksums";
import { type Mend, type Mender, mendContextOf } from "@/builders/codec/mend/mend-context";
import * as fields from "@/builders/codec/mend/mend-fields";
import { bringInside, moveToFreePlace } from "@/builders/codec/mend/mend-places";
import { layoutStep, newestLower } from "@/lib/domain/semver-step";
import type { Problem } from "@/lib/errors";

/** The smallest version that the differences allow and nobody has. */
const raiseVersion: Mender = (_problem, { layout, editor, options }) => {
  const published = options.publishedVersions ?? [];
  const previous = newestLower(published, layout.version) ?? published.find((one) => one.version === layout.version);
  if (!previous) return undefined;
  const step = layoutStep(previous, layout).step ?? "patch";
  let next = semver.inc(previous.version, step) as string;
  while (published.some((one) => one.version === next)) next = semver.inc(next, step) as string;
  return { label: `Make it ${next}`, edits: editor.set("", "version", JSON.stringify(next)) };
};

const takeFamily: Mender = (_problem, { editor, options: { family } }) =>
  family && { label: `Make it for ${family.code}`, edits: editor.set("", "family", JSON.stringify(family.code)) };

const takeDraftVersion: Mender = (_problem, { editor, options: { draftVersion } }) =>
  draftVersion === undefined
    ? undefined
    : { label: `Make it ${draftVersion}`, edits: editor.set("", "version", JSON.stringify(draftVersion)) };

/** Only what the schema does not know is taken out; everything else of shape asks for a decision. */
const dropUnknown: Mender = (problem, context) =>
  problem.message.endsWith("is not known here") ? fields.removeMember(problem, context) : undefined;

/** The checksum's own place, or the range it covers. */
const leaveKept: Mender = (problem, context) =>
  problem.path.endsWith("/over") ? shortenRange(problem, context) : moveToFreePlace(problem, context);

const MENDERS: Readonly<Record<string, Mender>> = {
  "layout.shape": dropUnknown,
  "layout.family_mismatch": takeFamily,
  "layout.step_too_small": raiseVersion,
  "layout.version_taken": raiseVersion,
  "layout.version_differs": takeDraftVersion,
  "layout.coefficient_missing": fields.addCoefficient,
  "layout.serial_missing": fields.addSerial,
  "layout.checksum_missing": addChecksum,
  "field.overlap": moveToFreePlace,
  "field.over_kept": moveToFreePlace,
  "field.unaligned": moveToFreePlace,
  "field.page_crossing": moveToFreePlace,
  "field.outside_memory": bringInside,
  "field.duplicate_name": fields.rename,
  "field.unknown_source": fields.nearestSource,
  "field.source_type": fields.nearestSource,
  "field.type_too_narrow": fields.widenType,
  "field.const_out_of_range": fields.widenType,
  "field.scale_zero": fields.removeMember,
  "field.scale_not_allowed": fields.removeMember,
  "field.length_not_allowed": fields.removeMember,
  "field.limits_not_allowed": fields.removeMember,
  "field.limits_inverted": fields.swapLimits,
  "field.length_missing": fields.giveLength,
  "field.serial_too_short": fields.lengthenSerial,
  "field.scale_coarse": fields.refineScale,
  "field.order_exceeded": fields.removeField,
  "field.not_covered": coverField,
  "checksum.overlap": moveToFreePlace,
  "checksum.over_kept": leaveKept,
  "checksum.page_crossing": moveToFreePlace,
  "checksum.outside_memory": bringInside,
  "checksum.covers_itself": shortenRange,
  "checksum.range_outside_memory": shortenRange,
  "checksum.range_invalid": swapEnds,
  "checksum.covers_later": computeEarlier,
  "kept.range_invalid": swapEnds,
  "reserved.range_invalid": swapEnds,
};

/**
 * The one-click mends of findings of the lint: edits of the author's own text that clear one and touch nothing else. Findings
 * where only the author can say what is meant, or nothing is free, have none.
 */
export function findMends(problems: readonly Problem[], text: string, options: LintOptions = {}): Map<Problem, Mend> {
  const mends = new Map<Problem, Mend>();
  const context = problems.length > 0 ? mendContextOf(text, options) : undefined;
  for (const problem of problems) {
    const mend = context && MENDERS[problem.code]?.(problem, context);
    if (mend && mend.edits.length > 0) mends.set(problem, mend);
  }
  return mends;
}
