/** The demo's programming stations and what they report. */
import { v7 } from "uuid";
import { getFamily } from "@/db/queries/families";
import { eachImages, type ImageRow } from "@/db/queries/images";
import type { StationActor } from "@/lib/services/context";
import { addStation } from "@/lib/services/stations/manage-stations";
import { recordWrites } from "@/lib/services/stations/record-writes";
import { WRITES_MAX, type WriteReport } from "@/schemas/api/stations";
import { type ModelDevice, signalMvV, thermometerCounts } from "./device-model";
import type { DemoLot } from "./lot";
import type { Story } from "./story";

/** Seconds that a write takes on the bench, scan to scan; and within one of them, from first byte to readback. */
const SECONDS_PER_DEVICE = 24;
const SECONDS_PER_WRITE = 7;
const ROOM_C = 22.4;

export interface DemoStation {
  actor: StationActor;
  counter: number;
}

export async function addDemoStation(story: Story, name: string, families: string[]): Promise<DemoStation> {
  const { id } = await addStation(story.as("admin"), { name, families });
  const rows = await Promise.all(families.map((code) => getFamily(story.db, code)));
  return { actor: { kind: "station", id, name, familyIds: rows.map((row) => row.id) }, counter: 0 };
}

/** What goes otherwise than it should, by serial. */
export type Mishaps = Readonly<Record<string, "mismatch" | "interrupted" | "failed">>;

export interface WriteStep {
  package: string;
  /** Range of the package's serials, as `slice` takes it. */
  devices: [from: number, to?: number];
  mishaps?: Mishaps;
}

/** Writes devices one after another until the clock's time, then reports them in batches, as the stations do. */
export async function writeDevices(story: Story, station: DemoStation, lot: DemoLot, step: WriteStep): Promise<void> {
  const images: ImageRow[] = [];
  for await (const part of eachImages(story.db, step.package)) images.push(...part);
  const chosen = images.slice(...step.devices);
  const modelOf = new Map(lot.devices.map((device) => [device.serial, device]));
  const reports = chosen.map((image, index) => {
    const device = modelOf.get(image.serial);
    if (device === undefined) throw new Error(`${image.serial} is no device of ${lot.code}`);
    return reportOf(story, station, lot, {
      image,
      device,
      index,
      of: chosen.length,
      mishap: step.mishaps?.[image.serial],
    });
  });
  for (let at = 0; at < reports.length; at += WRITES_MAX) {
    await recordWrites(story.asStation(station.actor), reports.slice(at, at + WRITES_MAX));
  }
}

interface OneWrite {
  image: ImageRow;
  device: ModelDevice;
  index: number;
  of: number;
  mishap: Mishaps[string] | undefined;
}

function reportOf(story: Story, station: DemoStation, lot: DemoLot, write: OneWrite): WriteReport {
  const { image, device, index, of, mishap } = write;
  station.counter += 1;
  const end = story.clock.now().getTime() - (of - index) * SECONDS_PER_DEVICE * 1000;
  const sha256 = image.sha256.toString("hex");
  const readback = {
    mismatch: sha256.replace(/^../, (byte) => (byte === "00" ? "01" : "00")),
    interrupted: null,
    failed: null,
  };
  return {
    id: v7({ msecs: end }),
    counter: station.counter,
    serial: image.serial,
    package: image.packageId,
    imageSha256: sha256,
    result: mishap === "interrupted" || mishap === "failed" ? mishap : "written",
    readbackSha256: mishap ? readback[mishap] : sha256,
    hardwareId: device.hardwareId,
    zeroMvV: Number(signalMvV(device, lot.family.document, ROOM_C, 0).toFixed(6)),
    deviceTemp: Number(thermometerCounts(device, ROOM_C).toFixed(1)),
    startedAt: new Date(end - SECONDS_PER_WRITE * 1000).toISOString(),
    finishedAt: new Date(end).toISOString(),
    operator: "lq",
    ...(mishap === "interrupted" && { detail: "Supply fell during page 5" }),
    ...(mishap === "failed" && { detail: "No answer from the device" }),
  };
}
