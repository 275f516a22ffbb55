import { sha256Hex } from "@/builders/bundle/sha256";
import type { Db } from "@/db/executor";
import { eachImages, type ImageRow, type NewImage } from "@/db/queries/images";
import { listPackageFiles } from "@/db/queries/package-provenance";
import type { PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import { type ComposedPackage, composePackage, readPackageInputs } from "./compose-package";

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
  const stored = new Map((await listPackageFiles(db, pkg.id)).map((file) => [file.name, file.sha256.toString("hex")]));
  const built = stored.get("manifest.json");
  if (built === undefined) throw new AppError("package.not_built", { message: "The package was not built." });
  const images: ImageRow[] = [];
  for await (const rows of eachImages(db, pkg.id)) images.push(...rows);
  try {
    const composed = await composePackage(db, await readPackageInputs(db, pkg), images.map(deviceOf));
    const serials = differingSerials(images, composed.images);
    const files = differingFiles(stored, composed);
    if (serials.length === 0 && files.length === 0) return { same: true };
    const some = { images: serials.length, serials: serials.slice(0, NAMED) };
    return { same: false, differs: { built, repeated: composed.digest, files, ...some } };
  } catch (error) {
    if (!(error instanceof AppError)) throw error;
    const failure = { code: error.code, message: error.message };
    return { same: false, differs: { built, repeated: null, files: [], images: 0, serials: [], failure } };
  }
}

/** Names of the files whose SHA-256 is another than that of what was built. */
function differingFiles(stored: ReadonlyMap<string, string>, composed: ComposedPackage): string[] {
  const files = {
    "manifest.json": composed.manifestBytes,
    "images.jsonl": composed.values,
    SHA256SUMS: composed.sums,
  };
  return Object.entries(files).flatMap(([name, content]) => (stored.get(name) === sha256Hex(content) ? [] : [name]));
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
