import { sha256Hex } from "@/builders/bundle/sha256";
import type { Db } from "@/db/executor";
import { eachImages, type ImageRow } from "@/db/queries/images";
import { listPackageFiles } from "@/db/queries/package-provenance";
import type { PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import { type ComposedPackage, composePackage, imageRowsOf, PART_DEVICES, readPackageInputs } from "./compose-package";

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
 * stored then. Writes nothing, and holds some images at a time.
 * @throws AppError `package.not_built`
 */
export async function repeatBuild(db: Db, pkg: PackageRow): Promise<RepeatedBuild> {
  const stored = new Map((await listPackageFiles(db, pkg.id)).map((file) => [file.name, file.sha256.toString("hex")]));
  const built = stored.get("manifest.json");
  if (built === undefined) throw new AppError("package.not_built", { message: "The package was not built." });
  const differing = { count: 0, serials: [] as string[] };
  let rows: readonly ImageRow[] = [];
  try {
    const composed = await composePackage(db, await readPackageInputs(db, pkg), eachImages(db, pkg.id, PART_DEVICES), {
      beforePart: async (devices) => {
        rows = devices as readonly ImageRow[];
      },
      onPart: (part) => {
        imageRowsOf(part).forEach((image, i) => {
          const row = rows[i] as ImageRow;
          if (image.bytes.equals(row.bytes) && image.hexSha256.equals(row.hexSha256)) return;
          if (differing.count++ < NAMED) differing.serials.push(row.serial);
        });
      },
    });
    const files = differingFiles(stored, composed);
    if (differing.count === 0 && files.length === 0) return { same: true };
    const images = { images: differing.count, serials: differing.serials };
    return { same: false, differs: { built, repeated: composed.digest, files, ...images } };
  } catch (error) {
    if (!(error instanceof AppError)) throw error;
    const failure = { code: error.code, message: error.message };
    return { same: false, differs: { built, repeated: null, files: [], serials: [], images: 0, failure } };
  }
}

function differingFiles(stored: ReadonlyMap<string, string>, composed: ComposedPackage): string[] {
  const repeated = {
    "manifest.json": composed.digest,
    "images.jsonl": composed.values.sha256,
    SHA256SUMS: sha256Hex(composed.sums),
  };
  return Object.entries(repeated).flatMap(([name, digest]) => (stored.get(name) === digest ? [] : [name]));
}
