import type { Db } from "@/db/executor";
import { listHeldSerials } from "@/db/queries/images";
import { getLayoutById } from "@/db/queries/layouts";
import { getLot } from "@/db/queries/lots";
import { listLapsedSets, listOtherFirmware } from "@/db/queries/package-inputs";
import type { PackageRow } from "@/db/queries/packages";
import { isFirmwareOf } from "@/lib/domain/firmware-range";
import { EVIDENCE_MAX, someSerials } from "@/lib/domain/package-checks/check";
import { AppError } from "@/lib/errors";

interface Block {
  code: "held" | "firmware" | "sets";
  message: string;
  count: number;
  serials: string[];
}

/**
 * Refuses a package that was superseded with something known by now that a new build would leave out.
 * @throws AppError `reinstatement.blocked` {blocks}
 */
export async function assertNotBlocked(db: Db, pkg: PackageRow): Promise<void> {
  const blocks: Block[] = [];
  const add = (code: Block["code"], serials: readonly string[], message: string) => {
    if (serials.length > 0)
      blocks.push({ code, message, count: serials.length, serials: serials.slice(0, EVIDENCE_MAX) });
  };
  const held = await listHeldSerials(db, pkg.id);
  add("held", held, `Held: ${someSerials(held)}.`);
  const lapsed = (await listLapsedSets(db, pkg.id)).map((one) => one.serial);
  add("sets", lapsed, `Coefficients no longer approved: ${someSerials(lapsed)}.`);
  const lot = await getLot(db, pkg.lotId);
  const range = (await getLayoutById(db, pkg.layoutId)).document.firmware;
  const other = (await listOtherFirmware(db, pkg.id, lot.firmware))
    .filter((one) => !isFirmwareOf(one.firmware, range))
    .map((one) => one.serial);
  add("firmware", other, `Firmware outside ${range}: ${someSerials(other)}.`);
  if (!isFirmwareOf(lot.firmware, range)) {
    blocks.push({
      code: "firmware",
      message: `The lot runs ${lot.firmware}, outside ${range}.`,
      count: 0,
      serials: [],
    });
  }
  if (blocks.length === 0) return;
  const message = `This release can't go live again. ${blocks.map((block) => block.message).join(" ")}`;
  throw new AppError("reinstatement.blocked", { blocks, message });
}

/** Refuses what is no earlier release. @throws AppError `reinstatement.already_live`, `reinstatement.withdrawn`, `package.wrong_state` */
export function assertSuperseded({ state, version }: PackageRow): void {
  if (state === "superseded") return;
  if (state === "live") throw new AppError("reinstatement.already_live", { message: `Package ${version} is live.` });
  if (state === "withdrawn") {
    const message = `Package ${version} was withdrawn and stays so; build another one.`;
    throw new AppError("reinstatement.withdrawn", { message });
  }
  const message = `Package ${version} never went live; only an earlier release can be made live again.`;
  throw new AppError("package.wrong_state", { state, needs: ["superseded"], message });
}
