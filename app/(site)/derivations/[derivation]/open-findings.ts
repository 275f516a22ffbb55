import type { DerivationView } from "@/schemas/api/derivations";

export type ShownFindings = DerivationView["findings"];

export interface FindingsInReach {
  hard: ShownFindings;
  /** Soft ones that nobody has accepted yet, by code. */
  open: Map<string, ShownFindings>;
}

/**
 * The findings that an approval meets: those of the lot, and those of the devices approved.
 * @param serials undefined for all.
 */
export function findingsInReach(
  { findings, acknowledgements }: Pick<DerivationView, "findings" | "acknowledgements">,
  serials: ReadonlySet<string> | undefined,
): FindingsInReach {
  const known = new Set(acknowledgements.map((one) => one.finding));
  const inReach = findings.filter(({ serial }) => serial === null || !serials || serials.has(serial));
  const open = new Map<string, ShownFindings>();
  for (const finding of inReach) {
    if (finding.severity !== "soft" || known.has(finding.id)) continue;
    open.set(finding.code, [...(open.get(finding.code) ?? []), finding]);
  }
  return { hard: inReach.filter(({ severity }) => severity === "hard"), open };
}

/** Reasons typed into the fields of {@link AcknowledgeFields}: for a code as a whole, or finding by finding. */
export function acknowledgementsOf(
  form: FormData,
  open: FindingsInReach["open"],
): { finding: string; reason: string }[] {
  const names = [...open].flatMap(([code, findings]) => [code, ...findings.map(({ id }) => id)]);
  return names.flatMap((finding) => {
    const reason = form.get(`accept ${finding}`);
    return typeof reason === "string" && reason.trim() !== "" ? [{ finding, reason }] : [];
  });
}
