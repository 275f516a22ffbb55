import { createHash } from "node:crypto";
import { PieceCutter } from "@/builders/bundle/pieces";
import { notReleasedText, previewVerifyText, verifyText } from "@/builders/bundle/verify-text";
import { PlainZip, toldOf } from "@/builders/bundle/zip";
import type { Db, Trx } from "@/db/executor";
import * as query from "@/db/queries/bundles";
import { findNewestRelease, type LivePeriodRow } from "@/db/queries/live-periods";
import { getPackage, getPackageFile, getValuesFile, type PackageRow } from "@/db/queries/packages";
import { getSigningKey } from "@/db/queries/signing-keys";
import type { Ctx } from "@/lib/services/context";
import { type BuiltFrom, eachHexFile, eachValuesPiece, openContent } from "./package-content";

/** Sequence under which a preview's pieces are stored; releases begin at 1. */
const PREVIEW = 0;

/**
 * The stored bundle of a package as it stands: of its newest release, or a preview where it never was released. Made here where
 * nobody made it yet; whoever asks meanwhile waits for that one. It is made some devices at a time, so that a web process that
 * has to do it goes on answering.
 * @throws AppError `package.not_found`, `package.not_built`, `package.bytes_differ`
 */
export async function assembleBundle(ctx: Ctx, packageId: string): Promise<query.BundleRow> {
  const release = await findNewestRelease(ctx.db, packageId);
  const sequence = release?.sequence ?? PREVIEW;
  const stored = await query.findBundle(ctx.db, packageId, sequence);
  if (stored) return stored;
  return ctx.db.transaction().execute(async (trx) => {
    await query.lockBundleMaking(trx, packageId, sequence);
    const meanwhile = await query.findBundle(trx, packageId, sequence);
    return meanwhile ?? makeBundle(trx, await getPackage(trx, packageId), release, ctx.now());
  });
}

async function makeBundle(
  trx: Trx,
  pkg: PackageRow,
  release: LivePeriodRow | undefined,
  madeAt: Date,
): Promise<query.BundleRow> {
  const sequence = release?.sequence ?? PREVIEW;
  const store = new PieceStore(trx, pkg.id, sequence);
  for await (const part of bundleParts(trx, pkg, release)) await store.add(part);
  const bundle = { packageId: pkg.id, sequence, madeAt, ...(await store.finish()) };
  await query.insertBundle(trx, bundle);
  return bundle;
}

/** Stores a stream of bytes in pieces of one length. */
class PieceStore {
  readonly #trx: Trx;
  readonly #bundle: { packageId: string; sequence: number };
  readonly #cutter = new PieceCutter(query.BUNDLE_CHUNK_BYTES);
  readonly #digest = createHash("sha256");
  #byteCount = 0;
  #position = 0;

  constructor(trx: Trx, packageId: string, sequence: number) {
    this.#trx = trx;
    this.#bundle = { packageId, sequence };
  }

  async add(part: Uint8Array): Promise<void> {
    for (const piece of this.#cutter.add(part)) await this.#store(piece);
  }

  async finish(): Promise<{ byteCount: number; sha256: Buffer }> {
    const rest = this.#cutter.rest();
    if (rest) await this.#store(rest);
    return { byteCount: this.#byteCount, sha256: this.#digest.digest() };
  }

  async #store(piece: Uint8Array): Promise<void> {
    this.#digest.update(piece);
    this.#byteCount += piece.length;
    const content = Buffer.from(piece.buffer, piece.byteOffset, piece.byteLength);
    await query.insertBundleChunk(this.#trx, { ...this.#bundle, position: this.#position++, content });
  }
}

interface NamedFile {
  path: string;
  content: Buffer;
}

/** The zip, in parts of any length (contract, section 5). Entries come by path. */
async function* bundleParts(db: Db, pkg: PackageRow, release: LivePeriodRow | undefined): AsyncGenerator<Uint8Array> {
  const zip = new PlainZip();
  const built = await openContent(db, pkg);
  const manifest = await getPackageFile(db, pkg.id, "manifest.json");
  const sums = await getPackageFile(db, pkg.id, "SHA256SUMS");
  const { before, after } = await filesAround(db, pkg, release);
  const first = [...before, file("SHA256SUMS", sums.content), file("VERIFY.txt", verifyTextFor(release))];
  for (const one of first) yield* entry(zip, one);
  yield* valuesEntry(zip, db, built);
  for await (const hexes of eachHexFile(db, built)) {
    yield zip.entries(hexes);
  }
  for (const one of [file("manifest.json", manifest.content), ...after]) yield* entry(zip, one);
  yield* zip.end();
}

function* entry(zip: PlainZip, { path, content }: NamedFile): Generator<Uint8Array> {
  yield zip.head(path, toldOf([content]));
  yield content;
}

/** `images.jsonl`: 100 MB of a lot of 50,000 devices, and so never held whole unless it was stored so. */
async function* valuesEntry(zip: PlainZip, db: Db, built: BuiltFrom): AsyncGenerator<Uint8Array> {
  const values = await getValuesFile(db, built.id);
  if ("content" in values) {
    yield* entry(zip, file(values.name, values.content));
    return;
  }
  yield zip.head(values.name, { crc32: values.crc32, size: values.byteCount });
  yield* eachValuesPiece(db, built, values.sha256);
}

const file = (path: string, content: Buffer | string): NamedFile => ({
  path,
  content: typeof content === "string" ? Buffer.from(content) : content,
});

const signedOf = (release: LivePeriodRow | undefined) =>
  release?.releaseDocument && release.signature && release.keyId
    ? { document: release.releaseDocument, signature: release.signature, keyId: release.keyId }
    : undefined;

const verifyTextFor = (release: LivePeriodRow | undefined) => (signedOf(release) ? verifyText() : previewVerifyText());

/** What stands beside the package's own files: the three of a release, or the note that it was none. */
async function filesAround(db: Db, pkg: PackageRow, release: LivePeriodRow | undefined) {
  const signed = signedOf(release);
  if (!signed) {
    const note = notReleasedText({ lot: pkg.lotCode, version: pkg.version });
    return { before: [file("NOT-RELEASED.txt", note)], after: [] };
  }
  const { publicPem } = await getSigningKey(db, signed.keyId);
  const after = [
    file("release.json", signed.document),
    file("release.sig", signed.signature),
    file("signing-key.pem", publicPem),
  ];
  return { before: [], after };
}
