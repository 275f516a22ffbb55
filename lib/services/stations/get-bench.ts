import { type BenchLotRow, listBenchLots as listRows } from "@/db/queries/bench";
import { findDevicesBySerial } from "@/db/queries/devices";
import { findImage } from "@/db/queries/images";
import { ROLES } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { type Carried, listCarriedImages } from "@/lib/services/devices/carried-image";

/** What may be written for a lot now. Digest as lower-case hex. */
export interface BenchLot {
  lot: string;
  family: string;
  /** Null where nothing is live: nothing may be written. */
  live: { package: string; version: string; digest: string; devices: number } | null;
  /** Rises with every change of what is live. */
  sequence: number;
  held: number;
}

/** One word on what to do with a device on the fixture. */
export type BenchVerdict =
  | "write"
  | "carries-already"
  | "held"
  | "scrapped"
  | "not-in-package"
  | "other-lot"
  | "unknown-serial"
  | "nothing-live"
  | "live-changed";

export interface BenchAnswer {
  serial: string;
  verdict: BenchVerdict;
  /** Lot of the serial, where it is another one. */
  lot: string | null;
  /** SHA-256 of the bytes to be written, lower-case hex; null where nothing may be written. */
  imageSha256: string | null;
  /** Board the image was made for; null where none was known. */
  hardwareId: string | null;
  /** What the device carries by record; null where nothing was reported. */
  carries: {
    version: string | null;
    known: boolean;
    live: boolean;
    sameValues: boolean | null;
    at: string;
    station: string;
  } | null;
}

const viewOf = (row: BenchLotRow): BenchLot => ({
  lot: row.lot,
  family: row.family,
  sequence: row.sequence,
  held: row.held,
  live:
    row.packageId !== null && row.version !== null && row.digest !== null
      ? { package: row.packageId, version: row.version, digest: row.digest.toString("hex"), devices: row.devices }
      : null,
});

/** Lots that ever had a release, with what is live now. Drafts are not shown: this is for operators too. */
export async function listBenchLots(ctx: PersonCtx): Promise<BenchLot[]> {
  return (await listRows(ctx.db)).map(viewOf);
}

/** One of {@link listBenchLots}. @throws AppError `lot.not_found` */
export async function getBenchLot(ctx: PersonCtx, lot: string): Promise<BenchLot> {
  const code = lot.trim().toUpperCase();
  const [found] = await listRows(ctx.db, code);
  if (!found)
    throw new AppError("lot.not_found", { lot: code, message: `Nothing was ever released for a lot ${code}.` });
  return viewOf(found);
}

/**
 * What to do with a scanned serial of a lot.
 * @param chosen package the person at the bench has chosen: if another one is live meanwhile, nothing may be written.
 * @throws AppError `auth.forbidden`
 */
export async function askBench(
  ctx: PersonCtx,
  input: { lot: BenchLot; chosen: string; serial: string },
): Promise<BenchAnswer> {
  assertRole(ctx, ...ROLES);
  const { lot, chosen, serial } = input;
  const empty = { serial, lot: null, imageSha256: null, hardwareId: null, carries: null };
  const [device] = await findDevicesBySerial(ctx.db, [serial]);
  if (!device) return { ...empty, verdict: "unknown-serial" };
  const [carried] = await listCarriedImages(ctx, { lotId: device.lotId, serial, limit: 1 });
  const carries = carried ? carriesOf(carried) : null;
  if (device.lotCode !== lot.lot) return { ...empty, verdict: "other-lot", lot: device.lotCode, carries };
  if (!lot.live) return { ...empty, verdict: "nothing-live", carries };
  if (lot.live.package !== chosen) return { ...empty, verdict: "live-changed", carries };
  if (device.scrapped) return { ...empty, verdict: "scrapped", carries };
  if (device.held) return { ...empty, verdict: "held", carries };
  const image = await findImage(ctx.db, chosen, serial);
  if (!image) return { ...empty, verdict: "not-in-package", carries };
  return {
    serial,
    lot: null,
    verdict: carries?.live || carries?.sameValues ? "carries-already" : "write",
    imageSha256: image.sha256.toString("hex"),
    hardwareId: image.hardwareId ?? device.hardwareId,
    carries,
  };
}

function carriesOf({ last, known, live, sameValuesAsLive }: Carried): BenchAnswer["carries"] {
  return (
    last && {
      version: last.version,
      known,
      live,
      sameValues: sameValuesAsLive,
      at: last.finishedAt,
      station: last.station,
    }
  );
}
