import type { Db } from "@/db/executor";
import { eachImages, type ImageRow, type NewImage } from "@/db/queries/images";
import { getPackageFile, type PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import { composePackage, readPackageInputs } from "./compose-package";

/** Serials named at most where images differ. */
const NAMED = 20;

export interface RepeatDifference {
  /** Package digest as it was built, lower-case hex. */
  built: string;
  /** As it came out now; null where nothing came out. */
  repeated: string | null;
  /** Files of the package that differ. */
  files: string[];
  /** Serials whose image differs, some of them. */
  serials: string[];
  images: number;
  /** Why nothing came out. */
  failure?: { code: string; message: string };
}

export interface RepeatedBuild {
  same: boolean;
  differs?: RepeatDifference;
}

/**
 * Composes a built package again from its layout, family revision and coefficient sets, and compares every byte with what was
 * stored then. Writes nothing.
 * @throws AppError `package.not_built`
 */
export async function repeatBuild(db: Db, pkg: PackageRow): Promise<RepeatedBuild> {
  const built = (await getPackageFile(db, pkg.id, "manifest.json")).sha256.toString("hex");
  const images: ImageRow[] = [];
  for await (const rows of eachImages(db, pkg.id)) images.push(...rows);
  try {
    const composed = await composePackage(db, await readPackageInputs(db, pkg), images.map(deviceOf));
    const serials = differingSerials(images, composed.images);
    const files = await differingFiles(db, pkg.id, {
      "manifest.json": composed.manifestBytes,
      "images.jsonl": composed.values,
      SHA256SUMS: composed.sums,
    });
    if (serials.length === 0 && files.length === 0) return { same: true };
    const differs = {
      built,
      repeated: composed.digest,
      files,
      images: serials.length,
      serials: serials.slice(0, NAMED),
    };
    return { same: false, differs };
  } catch (error) {
    if (!(error instanceof AppError)) throw error;
    const failure = { code: error.code, message: error.message };
    return { same: false, differs: { built, repeated: null, files: [], images: 0, serials: [], failure } };
  }
}

const deviceOf = ({ deviceId, serial, coefficientSetId, hardwareId }: ImageRow) => ({
  deviceId,
  serial,
  coefficientSetId,
  hardwareId,
});

function differingSerials(stored: readonly ImageRow[], composed: readonly NewImage[]): string[] {
  const bySerial = new Map(composed.map((image) => [image.serial, image]));
  return stored
    .filter((image) => {
      const again = bySerial.get(image.serial);
      return !again?.bytes.equals(image.bytes) || !again.hexSha256.equals(image.hexSha256);
    })
    .map((image) => image.serial);
}

async function differingFiles(db: Db, packageId: string, files: Record<string, Buffer>): Promise<string[]> {
  const differing: string[] = [];
  for (const [name, content] of Object.entries(files)) {
    if (!(await getPackageFile(db, packageId, name)).content.equals(content)) differing.push(name);
  }
  return differing;
}
