import { countDevices } from "@/db/queries/devices";
import { listPublishedLayoutDocuments } from "@/db/queries/layouts";
import { getLot } from "@/db/queries/lots";
import { listMakers } from "@/db/queries/makers";
import { listReviewers } from "@/db/queries/package-provenance";
import { isFirmwareOf } from "@/lib/domain/firmware-range";
import { LEFT_OUT_REASONS, type LeftOutReason } from "@/lib/domain/package-selection";
import type { PersonCtx } from "@/lib/services/context";
import { chooseSets, type Selection } from "./choose-sets";

/** How many serials of a reason are named. */
const NAMED = 12;

export interface PlannedContent {
  packed: number;
  leftOut: { reason: LeftOutReason; count: number; serials: string[] }[];
  /** Packed with an approved set while a newer one waits for a decision. */
  newerUndecided: number;
  /** Packed although another board is reported in them than the one that was measured. */
  otherBoard: number;
}

export interface Signer {
  name: string;
  /** What keeps the person from signing; empty where nothing does. */
  acts: string[];
}

export interface PackagePlan {
  firmware: string;
  devices: number;
  /** Published layouts of the family, highest version first. */
  layouts: { version: string; firmware: string; order: 1 | 2; fits: boolean }[];
  /** What would be packed, by the layout's order. */
  content: Partial<Record<1 | 2, PlannedContent>>;
  /** Everybody who holds the role of reviewer, and what they had a hand in. */
  signers: Signer[];
}

/** What a package of a lot would hold if it were built now, and who could still sign it. @throws AppError `lot.not_found` */
export async function planPackage(ctx: PersonCtx, lotCode: string): Promise<PackagePlan> {
  const lot = await getLot(ctx.db, lotCode);
  const documents = await listPublishedLayoutDocuments(ctx.db, lot.familyId);
  const layouts = documents.map(({ version, firmware, order }) => ({
    version,
    firmware,
    order: order as 1 | 2,
    fits: isFirmwareOf(lot.firmware, firmware),
  }));
  layouts.sort((a, b) => b.version.localeCompare(a.version, "en", { numeric: true }));
  const content: PackagePlan["content"] = {};
  const derivations = new Set<string>();
  let devices = await countDevices(ctx.db, lot.id);
  for (const order of new Set(layouts.map((layout) => layout.order))) {
    const selection = await chooseSets(ctx.db, lot.id, { order, familyRevisionId: lot.familyRevisionId });
    content[order] = contentOf(selection);
    for (const id of selection.derivationIds) derivations.add(id);
    devices = selection.lotDevices;
  }
  const signers = await signersOf(ctx, [...derivations]);
  return { firmware: lot.firmware, devices, layouts, content, signers };
}

function contentOf({ packed, leftOut, newerUndecided, otherBoard }: Selection): PlannedContent {
  const reasons = LEFT_OUT_REASONS.flatMap((reason) => {
    const serials = leftOut.filter((one) => one.reason === reason).map((one) => one.serial);
    return serials.length > 0 ? [{ reason, count: serials.length, serials: serials.slice(0, NAMED) }] : [];
  });
  return {
    packed: packed.length,
    leftOut: reasons,
    newerUndecided: newerUndecided.length,
    otherBoard: otherBoard.length,
  };
}

/** Reviewers with what they did for the derivations that would be packed; building counts for who asks. */
async function signersOf(ctx: PersonCtx, derivationIds: readonly string[]): Promise<Signer[]> {
  const acts = new Map<string, Set<string>>([[ctx.actor.id, new Set(["builds it"])]]);
  for (const id of derivationIds) {
    for (const { personId, act } of await listMakers(ctx.db, "derivation", id)) {
      acts.set(personId, (acts.get(personId) ?? new Set()).add(act));
    }
  }
  const reviewers = await listReviewers(ctx.db);
  return reviewers.map(({ id, name }) => ({ name, acts: [...(acts.get(id) ?? [])] }));
}
