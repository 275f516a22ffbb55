import { sha256Hex } from "@/builders/bundle/sha256";
import type { Trx } from "@/db/executor";
import type { Json } from "@/db/generated/types.generated";
import { insertChecks } from "@/db/queries/checks";
import { insertImages } from "@/db/queries/images";
import { lockLot } from "@/db/queries/lots";
import { insertMakers, listMakers, type MakerAct } from "@/db/queries/makers";
import { finishPackage, insertPackageDerivations, insertPackageFile, lockPackage } from "@/db/queries/packages";
import type { PackageCheck } from "@/lib/domain/package-checks/check";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Selection, setsSha256 } from "./choose-sets";
import { type ComposedPackage, type ImagePart, imageRowsOf, type PackageInputs } from "./compose-package";
import { countSelection } from "./package-counts";
import { selectDevices } from "./select-devices";

/** What a build came to, still to be stored. */
export interface Built {
  selection: Selection;
  parts: ImagePart[];
  composed: ComposedPackage;
  checks: PackageCheck[];
}

/**
 * Stores what a build came to, in one transaction: nobody sees a part of it. Does nothing where the package ended meanwhile.
 * @throws AppError `package.devices_changed`, `package.sets_changed`; nothing is then written
 */
export async function storePackage(ctx: Ctx, inputs: PackageInputs, built: Built): Promise<void> {
  const { pkg } = inputs;
  const { selection, composed, checks } = built;
  await ctx.db.transaction().execute(async (trx) => {
    await lockLot(trx, pkg.lotId);
    if ((await lockPackage(trx, pkg.id)).state !== "building") return;
    const now = await selectDevices(trx, inputs);
    if (setsSha256(now.packed) !== setsSha256(selection.packed)) {
      const message = "Coefficients were decided or withdrawn while the package was built; build again.";
      throw new AppError("package.sets_changed", { message });
    }
    await storeContent(trx, pkg.id, built);
    await addMakersOf(ctx, trx, pkg.id, composed.derivations);
    const counts = countSelection(selection);
    await finishPackage(trx, pkg.id, {
      state: "draft",
      digest: Buffer.from(composed.digest, "hex"),
      counts: counts as unknown as Json,
      failure: null,
      builtAt: ctx.now(),
    });
    await appendEvent(ctx, trx, {
      action: "package.built",
      subject: pkg.id,
      data: {
        lot: pkg.lotCode,
        version: pkg.version,
        digest: composed.digest,
        devices: counts.devices,
        leftOut: counts.leftOut,
        derivations: composed.derivations.map((one) => one.id),
        checks: Object.fromEntries(checks.map((check) => [check.code, check.verdict])),
      },
    });
  });
}

async function storeContent(trx: Trx, packageId: string, { parts, composed, checks }: Built): Promise<void> {
  for (const part of parts) await insertImages(trx, packageId, imageRowsOf(part));
  const { manifest, digest, values, sums, derivations } = composed;
  const files = [
    { name: "manifest.json", content: manifest, sha256: digest },
    { name: "images.jsonl", byteCount: values.length, crc32: values.crc32, sha256: values.sha256 },
    { name: "SHA256SUMS", content: sums, sha256: sha256Hex(sums) },
  ];
  for (const file of files) {
    await insertPackageFile(trx, packageId, { ...file, sha256: Buffer.from(file.sha256, "hex") });
  }
  await insertPackageDerivations(
    trx,
    packageId,
    derivations.map((one) => one.id),
  );
  await insertChecks(
    trx,
    packageId,
    checks.map((check) => ({ ...check, evidence: check.evidence as Json })),
  );
}

/** Whoever made one of the derivations has a hand in the package too (contract, section 6). */
async function addMakersOf(
  ctx: Ctx,
  trx: Trx,
  packageId: string,
  derivations: readonly { id: string }[],
): Promise<void> {
  const makers = new Map<string, { personId: string; act: MakerAct }>();
  for (const { id } of derivations) {
    for (const { personId, act } of await listMakers(trx, "derivation", id)) {
      makers.set(`${personId} ${act}`, { personId, act: act as MakerAct });
    }
  }
  const subject = { subjectKind: "package" as const, subjectId: packageId, at: ctx.now() };
  await insertMakers(
    trx,
    [...makers.values()].map((maker) => ({ ...maker, ...subject, id: ctx.newId() })),
  );
}
