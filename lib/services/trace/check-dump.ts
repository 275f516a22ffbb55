import { sha256Hex } from "@/builders/bundle/sha256";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { checkChecksums, decodeImage, imageDigestBytes } from "@/builders/codec/image";
import { findDevicesBySerial } from "@/db/queries/devices";
import { findImagesBySha256, listImagesOfDevice } from "@/db/queries/images";
import { listLayoutsInUse } from "@/db/queries/package-layouts";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import type { DumpResult } from "@/schemas/api/devices";
import { differencesOf } from "./dump-differences";
import { type DumpFile, memoryOf, readDumpFile, wrongShape } from "./dump-file";

type KnownImage = Awaited<ReturnType<typeof listImagesOfDevice>>[number];

interface Candidate {
  image: KnownImage;
  layout: CompiledLayout;
  bytes: Uint8Array;
}

/**
 * Says which image a memory dump is, or which bytes and parameters differ.
 * @param input serial as printed on the device, where it is known; bytes as Intel HEX or as raw memory from the base address on.
 * @throws AppError `hex.*` with the line, `dump.empty`, `dump.wrong_length`, `dump.incomplete`, `device.not_found`
 */
export async function checkDump(
  ctx: Ctx,
  input: { serial?: string; format: "hex" | "raw"; bytes: Buffer },
): Promise<DumpResult> {
  const dump = readDumpFile(input);
  if (input.serial !== undefined) return checkAgainstDevice(ctx, input.serial, dump);
  const known = await findByDigest(ctx, dump);
  if (known) return checkAgainstDevice(ctx, known, dump);
  for (const { document } of await listLayoutsInUse(ctx.db)) {
    const layout = compileLayout(document);
    const bytes = memoryOf(layout, dump);
    const serial = bytes && serialIn(layout, bytes);
    if (serial && (await findDevicesBySerial(ctx.db, [serial])).length === 1)
      return checkAgainstDevice(ctx, serial, dump);
  }
  return unknown(
    null,
    "No layout in use makes sense of these bytes. Check that the whole memory was read, from its base address.",
  );
}

async function checkAgainstDevice(ctx: Ctx, serial: string, dump: DumpFile): Promise<DumpResult> {
  const [device] = await findDevicesBySerial(ctx.db, [serial]);
  if (!device) throw new AppError("device.not_found", { serial, message: `No device has the serial ${serial}.` });
  const images = await listImagesOfDevice(ctx.db, device.id);
  const layouts = await layoutsOfPackages(
    ctx.db,
    images.map((image) => image.packageId),
  );
  const fitting = images.flatMap((image): Candidate[] => {
    const layout = layouts.get(image.packageId);
    const bytes = layout && memoryOf(layout, dump);
    return layout && bytes ? [{ image, layout, bytes }] : [];
  });
  const exact = preferred(fitting.filter(isExact));
  if (exact) return exactResult(serial, exact);
  const nearest = nearestOf(fitting);
  if (nearest) return differingResult(ctx, serial, nearest);
  if (images.length === 0) return unknown(serial, `${serial} is in no package, so there is nothing to compare with.`);
  throw wrongShape(layouts.values().next().value as CompiledLayout, dump);
}

function factsOf({ image, layout, bytes }: Candidate) {
  return {
    package: image.packageId,
    version: image.version,
    live: image.state === "live",
    checksums: checksumsOf(layout, bytes),
  };
}

function exactResult(serial: string, candidate: Candidate): DumpResult {
  const advice = exactAdvice(candidate.image);
  return { match: "exact", serial, ...factsOf(candidate), differences: [], advice };
}

async function differingResult(ctx: Ctx, serial: string, candidate: Candidate): Promise<DumpResult> {
  const { image, layout, bytes } = candidate;
  const facts = factsOf(candidate);
  const found = serialIn(layout, bytes);
  const other = found !== null && found !== serial ? await findDevicesBySerial(ctx.db, [found]) : [];
  const differences = differencesOf(layout, image.bytes, bytes);
  if (other.length === 1) {
    const advice = `These bytes name ${found}, not ${serial}. Boards may have been swapped: hold both devices, compare the hardware ids, and do not write until it is clear which cell this is.`;
    return { match: "other-serial", serial: found, ...facts, differences, advice };
  }
  const advice = differsAdvice(facts.checksums, new Set(differences.map(({ at }) => at)).size, image.version);
  return { match: "differs", serial, ...facts, differences, advice };
}

const isExact = ({ image, layout, bytes }: Candidate) =>
  sha256Hex(imageDigestBytes(layout, bytes)) === image.sha256.toString("hex");

/** What was ever released goes before what never was, the live image before all. */
const RANK: Record<string, number> = { live: 0, superseded: 1, withdrawn: 2 };
const NEVER_RELEASED = 3;
const rankOf = ({ image }: Candidate): number => RANK[image.state] ?? NEVER_RELEASED;

function preferred(candidates: readonly Candidate[]): Candidate | undefined {
  return [...candidates].sort((a, b) => rankOf(a) - rankOf(b))[0];
}

/** Of what was ever released the image that differs in the fewest bytes, on a tie the live one, then the newest. */
function nearestOf(candidates: readonly Candidate[]): Candidate | undefined {
  const released = candidates.filter((candidate) => rankOf(candidate) < NEVER_RELEASED);
  const counted = (released.length > 0 ? released : candidates).map((candidate) => {
    const digested = imageDigestBytes(candidate.layout, candidate.bytes);
    return { candidate, count: candidate.image.bytes.reduce((n, byte, at) => n + (byte === digested[at] ? 0 : 1), 0) };
  });
  return counted.sort((a, b) => a.count - b.count || rankOf(a.candidate) - rankOf(b.candidate))[0]?.candidate;
}

async function findByDigest(ctx: Ctx, dump: DumpFile): Promise<string | null> {
  for (const { document } of await listLayoutsInUse(ctx.db)) {
    const layout = compileLayout(document);
    const bytes = memoryOf(layout, dump);
    if (!bytes) continue;
    const [image] = await findImagesBySha256(ctx.db, Buffer.from(sha256Hex(imageDigestBytes(layout, bytes)), "hex"));
    if (image) return image.serial;
  }
  return null;
}

const checksumsOf = (layout: CompiledLayout, bytes: Uint8Array) =>
  checkChecksums(layout, bytes).map(({ name, ok }) => ({ name, ok }));

function serialIn(layout: CompiledLayout, bytes: Uint8Array): string | null {
  const field = layout.fields.find(({ source }) => source === "device.serial");
  const value = field && decodeImage(layout, bytes).find(({ name }) => name === field.name)?.value;
  return typeof value === "string" && value !== "" ? value : null;
}

function exactAdvice(image: KnownImage): string {
  if (image.state === "live") return `Exactly the image of ${image.version}, which is live. Nothing to do.`;
  if (image.state === "withdrawn")
    return `Exactly the image of ${image.version}, which was withdrawn. Hold the device and write the live release.`;
  return `Exactly the image of ${image.version}, which is not live. Whether it has to be written again stands on the lot's re-write list.`;
}

function differsAdvice(checksums: { ok: boolean }[], count: number, version: string): string {
  const start = `${count} byte${count === 1 ? "" : "s"} differ from the image of ${version}.`;
  if (checksums.some(({ ok }) => !ok))
    return `${start} A checksum inside is wrong too: the memory is damaged or was written in part. Hold the device, write the live release again and read back.`;
  return `${start} Its checksums are right, so these bytes were written on purpose by something else. Hold the device and find out what wrote it before writing again.`;
}

function unknown(serial: string | null, advice: string): DumpResult {
  return {
    match: "unknown",
    serial,
    package: null,
    version: null,
    live: false,
    checksums: [],
    differences: [],
    advice,
  };
}
