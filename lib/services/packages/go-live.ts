import { releaseBytes, signRelease } from "@/builders/bundle/release";
import type { Trx } from "@/db/executor";
import { lockLedgerHead } from "@/db/queries/ledger";
import { insertLivePeriod } from "@/db/queries/live-periods";
import { getLot } from "@/db/queries/lots";
import { findLivePackage, movePackage, type PackageRow } from "@/db/queries/packages";
import { FIRST_PREVIOUS } from "@/lib/domain/ledger/ledger-event";
import { enqueue } from "@/lib/jobs/enqueue";
import type { PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { ensureSigningKey } from "@/lib/services/signing-keys/current-signing-key";
import { packageEventData } from "./package-event";
import { readReleaseFacts } from "./release-document";

export interface GoLive {
  kind: "release" | "reinstatement";
  reason: string | null;
  /** The request that a second person granted, where an earlier release goes live again. */
  reinstatementId?: string;
}

/**
 * Makes a package live in the caller's transaction: what was live is superseded, the lot's sequence rises by one,
 * `release.json` is made and signed. Nothing of the caller's may follow but what ends its own request.
 * @param pkg under {@link lockLotAndPackage}, approved or superseded.
 * @returns the new sequence
 * @throws `package.not_approved`, `package.wrong_state` as raised by the database
 */
export async function goLive(ctx: PersonCtx, trx: Trx, pkg: PackageRow, input: GoLive): Promise<number> {
  const { kind, reason, reinstatementId } = input;
  const at = ctx.now();
  const sequence = (await getLot(trx, pkg.lotId)).sequence + 1;
  const before = await findLivePackage(trx, pkg.lotId);
  if (before) await movePackage(trx, before.id, { state: "superseded" });
  await movePackage(trx, pkg.id, { state: "live" });
  const key = await ensureSigningKey(trx, at);
  await enqueue(trx, "assemble-bundle", { packageId: pkg.id });
  const facts = await readReleaseFacts(trx, pkg, {
    sequence,
    kind,
    reason,
    releasedAt: at,
    keyId: key.id,
    ...(reinstatementId !== undefined && { reinstatementId }),
  });
  // From here to commit the ledger stands still, so that the head named in the release is the newest event before its own.
  const head = await lockLedgerHead(trx);
  const document = Buffer.from(releaseBytes({ ...facts, ledgerHead: head?.hash.toString("hex") ?? FIRST_PREVIOUS }));
  const signature = Buffer.from(signRelease(document, key.privatePem));
  await insertLivePeriod(trx, {
    id: ctx.newId(),
    lotId: pkg.lotId,
    sequence,
    kind,
    packageId: pkg.id,
    reason,
    personId: ctx.actor.id,
    startedAt: at,
    releaseDocument: document,
    signature,
    keyId: key.id,
  });
  await appendEvent(ctx, trx, {
    action: kind === "release" ? "package.released" : "package.reinstated",
    subject: pkg.id,
    data: packageEventData(pkg, {
      sequence,
      keyId: key.id,
      superseded: before?.id ?? null,
      ...(reinstatementId !== undefined && { reinstatement: reinstatementId }),
    }),
    texts: { reason },
  });
  return sequence;
}
