import type { Db } from "@/db/executor";
import { AppError } from "@/lib/errors";
import { chooseSets, type Selection, serialsSha256 } from "./choose-sets";
import type { PackageInputs } from "./compose-package";
import { countsOf } from "./package-counts";

/** What the package takes, which has to be the devices that it was numbered for. @throws AppError `package.devices_changed` */
export async function selectDevices(db: Db, { pkg, layout }: PackageInputs): Promise<Selection> {
  const { familyRevisionId } = pkg;
  const selection = await chooseSets(db, pkg.lotId, { order: layout.document.order, familyRevisionId });
  if (serialsSha256(selection.packed) === countsOf(pkg).serialsSha256) return selection;
  const message = "Other devices have approved coefficients than when the build was asked for; build again.";
  throw new AppError("package.devices_changed", { message });
}
