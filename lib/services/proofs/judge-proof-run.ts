import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { decodeImage } from "@/builders/codec/image";
import { twinOf } from "@/builders/codec/twin/twin";
import { judgeProof, type ProofReading } from "@/builders/codec/twin/twin-proof";
import { listImageBytes } from "@/db/queries/images";
import { listProvenDevices, type ProvenDeviceRow } from "@/db/queries/proofs";
import { listReadings } from "@/db/queries/readings";
import { getRun } from "@/db/queries/runs";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import { getRulesOfLot } from "@/lib/services/lots/lot-rules";
import type { ProofDevice, ProofRunView } from "@/schemas/api/proofs";

const DEVICES_SHOWN = 1_000;

/** One device as judged, with the run it was read in and when. */
export type JudgedDevice = ProofDevice & { run: string; readAt: string };

/**
 * Holds the output of every device of a proof run against the prediction from the image it carried when it was read.
 * Judged anew at every reading of this page: a station's record may arrive later than the readings.
 * @throws AppError `run.not_found`, `run.no_proof`
 */
export async function getProofRun(ctx: Ctx, id: string): Promise<ProofRunView> {
  const run = await getRun(ctx.db, id);
  if (run.purpose !== "proof") {
    const message = `This is a ${run.purpose} run: only a proof run is held against images.`;
    throw new AppError("run.no_proof", { run: id, purpose: run.purpose, message });
  }
  const judged = await judgeProofRuns(ctx, run.lotCode, [id]);
  const count = (state: ProofDevice["state"]) => judged.filter((device) => device.state === state).length;
  return {
    run: id,
    lot: run.lotCode,
    readAt: judged.map((device) => device.readAt).sort()[0] ?? null,
    counts: { agrees: count("agrees"), differs: count("differs"), notJudged: count("not-judged") },
    devices: judged.slice(0, DEVICES_SHOWN),
  };
}

/** Devices of proof runs of one lot, judged, by run and serial. */
export async function judgeProofRuns(ctx: Ctx, lot: string, runIds: readonly string[]): Promise<JudgedDevice[]> {
  if (runIds.length === 0) return [];
  const rules = await getRulesOfLot(ctx, lot);
  const devices = await listProvenDevices(ctx.db, runIds);
  const readings = readingsByDevice(await listReadings(ctx.db, runIds));
  const images = await imagesOf(ctx, devices);
  return devices.map((device) => {
    const rows = readings.get(`${device.runId} ${device.serial}`) ?? [];
    return judge(device, rows, rules, images.get(`${device.packageId} ${device.serial}`));
  });
}

interface CarriedImage {
  layout: CompiledLayout;
  bytes: Buffer;
}

/** The images that the devices carried, by package and serial. */
async function imagesOf(ctx: Ctx, devices: readonly ProvenDeviceRow[]): Promise<Map<string, CarriedImage>> {
  const packageIds = [...new Set(devices.flatMap(({ packageId }) => (packageId ? [packageId] : [])))];
  const layouts = await layoutsOfPackages(ctx.db, packageIds);
  const images = new Map<string, CarriedImage>();
  for (const packageId of packageIds) {
    const layout = layouts.get(packageId);
    const serials = devices.filter((device) => device.packageId === packageId).map((device) => device.serial);
    if (!layout) continue;
    for (const [serial, bytes] of await listImageBytes(ctx.db, packageId, serials)) {
      images.set(`${packageId} ${serial}`, { layout, bytes });
    }
  }
  return images;
}

function readingsByDevice(rows: Awaited<ReturnType<typeof listReadings>>): Map<string, ProofReading[]> {
  const byDevice = new Map<string, ProofReading[]>();
  for (const { runId, serial, row, point, chamberC, deviceTemp, loadKg, signalMvV, outputMvV } of rows) {
    if (outputMvV === null || outputMvV === undefined) continue;
    const key = `${runId} ${serial}`;
    const reading = { row, point, chamberC, deviceTemp, loadKg, signalMvV, outputMvV };
    const known = byDevice.get(key);
    if (known) known.push(reading);
    else byDevice.set(key, [reading]);
  }
  return byDevice;
}

/** Why what the memory held is not known; null where it is. */
function notKnown({ outcome, boardReplacedAt, writtenAt }: ProvenDeviceRow): string | null {
  if (outcome === null || writtenAt === null) return "No station had written it when it was read.";
  if (outcome !== "verified")
    return "Its last record before the reading is not a verified one: what it held is unknown.";
  if (boardReplacedAt && boardReplacedAt >= writtenAt)
    return "Its board was replaced after it was written: what it held is unknown.";
  return null;
}

function judge(
  device: ProvenDeviceRow,
  readings: readonly ProofReading[],
  rules: FamilyRules,
  image: CarriedImage | undefined,
): JudgedDevice {
  const facts = {
    run: device.runId,
    readAt: device.readAt.toISOString(),
    serial: device.serial,
    package: device.packageId,
    version: device.version,
    layout: device.layout,
    firmware: device.firmware,
    imageSha256: device.imageSha256?.toString("hex") ?? null,
    writtenAt: device.writtenAt?.toISOString() ?? null,
  };
  const open = (reason: string): JudgedDevice => ({
    ...facts,
    state: "not-judged",
    reason,
    worst: null,
    rows: [],
    shown: [],
  });
  const unknown = notKnown(device);
  if (unknown) return open(unknown);
  if (!image) return open("The package that was reported holds no image of it.");
  if (readings.length === 0) return open("None of its readings has an output.");
  const decoded = decodeImage(image.layout, image.bytes);
  const twin = twinOf(image.layout, decoded, { referenceTemperature: rules.referenceC });
  const { agrees, ...judgement } = judgeProof(twin, readings, rules);
  return { ...facts, state: agrees ? "agrees" : "differs", reason: null, ...judgement };
}
