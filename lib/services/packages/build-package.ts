import { appErrorFromDatabase } from "@/db/constraint-codes";
import { listImageBytes } from "@/db/queries/images";
import { listFirmwareOtherThan, listSetsNotApproved } from "@/db/queries/package-inputs";
import { findLivePackage, getPackage, type PackageRow, setPackageProgress } from "@/db/queries/packages";
import { slicesOf } from "@/db/slices";
import { EVIDENCE_MAX } from "@/lib/domain/package-checks/check";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import { findFirstOff } from "@/lib/services/proofs/list-lot-proofs";
import { PackageChecker } from "./check-package";
import type { LivePackage } from "./checking/difference-gatherer";
import { composePackage, type ImagePart, PART_DEVICES, type PackageInputs, readPackageInputs } from "./compose-package";
import { failBuild } from "./end-build";
import { countsOf } from "./package-counts";
import { selectDevices } from "./select-devices";
import { type Built, storePackage } from "./store-package";

/**
 * The worker's part of a build: chooses the sets, composes the package, checks it by decoding it again, composes it a second
 * time, and stores everything in one transaction. Taken up again after a fall it starts anew, and does nothing where the
 * package has ended already; what was cancelled meanwhile ends at the next part. What can't be built ends as failed and
 * leaves no image.
 * @throws what is wrong with the database or with our code, so that the queue tries again or the log tells
 */
export async function buildPackage(ctx: Ctx, { packageId }: { packageId: string }): Promise<void> {
  const pkg = await getPackage(ctx.db, packageId);
  if (pkg.state !== "building") return;
  try {
    const inputs = await readPackageInputs(ctx.db, pkg);
    await storePackage(ctx, inputs, await build(ctx, inputs));
  } catch (error) {
    if (mayPass(error)) throw error;
    const known = error instanceof AppError ? error : undefined;
    const message = "Something went wrong here; the log of the worker says what.";
    await failBuild(ctx, pkg, known ?? new AppError("server.fault", { message }));
    if (!known) throw error;
  }
}

/** Statement timeout, serialization failure, deadlock and lock timeout (PostgreSQL, appendix A): the next try may do. */
const PASSING: readonly unknown[] = ["57014", "40001", "40P01", "55P03"];

function mayPass(error: unknown): boolean {
  if (appErrorFromDatabase(error)?.code === "database.unavailable") return true;
  return typeof error === "object" && error !== null && "code" in error && PASSING.includes(error.code);
}

async function build(ctx: Ctx, inputs: PackageInputs): Promise<Built> {
  const { pkg } = inputs;
  const selection = await selectDevices(ctx.db, inputs);
  const { packed } = selection;
  const live = await findLive(ctx.db, pkg);
  const checker = new PackageChecker(inputs, { devices: packed.length, live });
  const tell = progressOf(ctx.db, pkg.id, packed.length);
  const parts: ImagePart[] = [];
  let liveBytes = new Map<string, Buffer>();
  await tell("composing and checking", 0);
  const composed = await composePackage(ctx.db, inputs, slicesOf(packed, PART_DEVICES), {
    beforePart: async (devices) => {
      liveBytes = live
        ? await listImageBytes(
            ctx.db,
            live.id,
            devices.map((one) => one.serial),
          )
        : liveBytes;
    },
    onImage: (image) => checker.add(image, liveBytes.get(image.device.serial)),
    onPart: (part) => {
      parts.push(part);
      return tell("composing and checking", part.devices.length);
    },
  });
  const repeated = await repeat(ctx.db, inputs, parts, tell);
  await tell("storing", packed.length);
  const ids = packed.map((one) => one.coefficientSetId);
  const checks = checker.finish({
    coverage: { ...selection, packed: packed.length },
    decidedSets: { notApproved: await listSetsNotApproved(ctx.db, ids) },
    firmware: {
      others: await listFirmwareOtherThan(
        ctx.db,
        packed.map((one) => one.deviceId),
        pkg.firmware,
      ),
    },
    repeatability: { digest: composed.digest, ...repeated },
    derivations: composed.derivations,
    provenRange: composed.provenRange,
    firstOff: await findFirstOff(ctx, pkg),
  });
  return { selection, parts, composed, checks };
}

/** Reads the inputs and composes once more: which images came out otherwise, and the package digest. */
async function repeat(db: Ctx["db"], inputs: PackageInputs, parts: readonly ImagePart[], tell: Tell) {
  const differing: string[] = [];
  let at = 0;
  await tell("composing again", 0);
  const { digest } = await composePackage(
    db,
    inputs,
    parts.map((part) => part.devices),
    {
      onPart: (again) => {
        const first = parts[at++] as ImagePart;
        differing.push(...differingSerials(first, again).slice(0, EVIDENCE_MAX - differing.length));
        return tell("composing again", again.devices.length);
      },
    },
  );
  return { repeated: digest, differing };
}

function differingSerials(first: ImagePart, again: ImagePart): string[] {
  if (first.bytes.equals(again.bytes) && first.hexSha256.equals(again.hexSha256)) return [];
  const size = first.bytes.length / first.devices.length;
  const differs = (a: Buffer, b: Buffer, i: number, width: number) =>
    a.compare(b, i * width, (i + 1) * width, i * width, (i + 1) * width) !== 0;
  return first.devices
    .filter((_, i) => differs(first.bytes, again.bytes, i, size) || differs(first.hexSha256, again.hexSha256, i, 32))
    .map((device) => device.serial);
}

/** Takes a step and how many devices more are through it. */
type Tell = (step: "composing and checking" | "composing again" | "storing", more: number) => Promise<void>;

/**
 * Tells how far a build is, and hears at the same time whether it is still wanted.
 * @throws AppError `package.cancelled` where the package is no longer building
 */
function progressOf(db: Ctx["db"], packageId: string, total: number): Tell {
  const progress = { done: 0, total, step: "" };
  return async (step, more) => {
    progress.done = step === progress.step ? progress.done + more : more;
    progress.step = step;
    if (await setPackageProgress(db, packageId, progress)) return;
    throw new AppError("package.cancelled", { message: "The build was cancelled." });
  };
}

/** What is live for the package's lot, to be compared with. */
async function findLive(db: Ctx["db"], pkg: PackageRow): Promise<LivePackage | null> {
  const live = await findLivePackage(db, pkg.lotId);
  if (!live) return null;
  const layout = (await layoutsOfPackages(db, [live.id])).get(live.id);
  if (!layout || !live.digest) throw new Error(`the live package ${live.id} has no layout or no digest`);
  const { devices } = countsOf(live);
  return { id: live.id, version: live.version, digest: live.digest.toString("hex"), layout, images: devices };
}
