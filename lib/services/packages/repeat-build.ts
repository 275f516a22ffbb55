import { sha256Hex } from "@/builders/bundle/sha256";
import type { Db } from "@/db/executor";
import { eachImages, type ImageRow } from "@/db/queries/images";
import { listPackageFiles } from "@/db/queries/package-provenance";
import type { PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import { type ComposedPackage, composePackage, imageRowsOf, PART_DEVICES, readPackageInputs } from "./compose-package";
import { type RepeatedDerivation, repeatDerivations } from "./repeat-derivations";

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
  /** Whether every byte came out as it was built, and every value that was derived again as it was stored. */
  same: boolean;
  derivations: RepeatedDerivation[];
  differs?: RepeatDifference;
}

/**
 * Builds a package again from the stored inputs: derives its coefficients anew from the readings as they were uploaded, composes
 * it from its layout, family revision and coefficient sets, and compares every value and every byte with what was stored
 * then. Writes nothing, and holds some images at a time.
 * @throws AppError `package.not_built`
 */
export async function repeatBuild(db: Db, pkg: PackageRow): Promise<RepeatedBuild> {
  const composed = await repeatComposing(db, pkg);
  const derivations = await repeatDerivations(db, pkg.id);
  const same = composed.same && derivations.every((one) => one.differing === 0);
  return { ...composed, same, derivations };
}

async function repeatComposing(db: Db, pkg: PackageRow): Promise<Omit<RepeatedBuild, "derivations">> {
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
