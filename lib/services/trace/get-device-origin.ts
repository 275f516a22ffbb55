import { compileLayout } from "@/builders/codec/compile-layout";
import { type DecodedField, decodeImage } from "@/builders/codec/image";
import { getDevice } from "@/db/queries/device-events";
import { findImageOrigin, type ImageOriginRow, listOriginRuns, listSignatures } from "@/db/queries/device-origin";
import { findLivePackage } from "@/db/queries/packages";
import { READERS } from "@/lib/domain/roles";
import type { PersonCtx } from "@/lib/services/context";

/** An image of a device and everything it came from, back to the readings. Digests as lower-case hex. */
export interface DeviceOrigin {
  /** Whether this is what the deciding write record put there, or what the live release holds for it. */
  basis: "carried" | "live";
  package: {
    id: string;
    version: string;
    state: string;
    digest: string;
    firmware: string;
    builtAt: string;
    builder: string;
  };
  image: {
    sha256: string;
    hex: string;
    hardwareId: string | null;
    fill: number;
    kept: readonly (readonly [number, number])[];
    fields: (DecodedField & { source: string | null })[];
  };
  layout: { version: string; sha256: string };
  revision: { number: number; sha256: string };
  derivation: {
    id: string;
    method: string;
    order: number;
    sha256: string;
    engine: string;
    role: string;
    state: string | null;
    provenRange: [number, number] | null;
    derivedAt: string;
    deriver: string;
  };
  runs: {
    id: string;
    purpose: string;
    sha256: string;
    createdAt: string;
    person: string;
    superseded: boolean;
    /** What it measured on this very device; null where the device is not in it. */
    own: { rows: number; lowC: number; highC: number; loaded: boolean } | null;
    equipment: { code: string; kind: string; certificate: string }[];
  }[];
  signatures: { what: string; name: string; meaning: string; at: string }[];
}

const RELEASED = ["live", "superseded", "withdrawn"];

/**
 * Where a device's image came from: the one it carries, else the one the live release holds for it; null where there is neither.
 * Who is no reader, as an operator, gets released images only.
 * @param carried package of the deciding write record, null where what the device carries is not known.
 * @throws AppError `device.not_found`
 */
export async function getDeviceOrigin(
  ctx: PersonCtx,
  input: { serial: string; carried: string | null },
): Promise<DeviceOrigin | null> {
  const device = await getDevice(ctx.db, input.serial);
  const packageId = input.carried ?? (await findLivePackage(ctx.db, device.lotId))?.id;
  const row = packageId === undefined ? undefined : await findImageOrigin(ctx.db, packageId, device.id);
  if (!row) return null;
  if (!RELEASED.includes(row.state) && !READERS.some((role) => ctx.actor.roles.includes(role))) return null;
  const runs = await listOriginRuns(ctx.db, row.derivationId, device.id);
  return {
    basis: input.carried === null ? "live" : "carried",
    ...partsOf(row),
    runs: runs.map(({ ownRows, ownLowC, ownHighC, ownLoaded, ...run }) => ({
      id: run.id,
      purpose: run.purpose,
      sha256: run.sha256.toString("hex"),
      createdAt: new Date(run.createdAt).toISOString(),
      person: run.person,
      superseded: run.supersededById !== null,
      own:
        ownRows > 0 && ownLowC !== null && ownHighC !== null
          ? { rows: ownRows, lowC: ownLowC, highC: ownHighC, loaded: ownLoaded }
          : null,
      equipment: run.equipment,
    })),
    signatures: await signaturesOf(ctx, row),
  };
}

function partsOf(row: ImageOriginRow): Omit<DeviceOrigin, "basis" | "runs" | "signatures"> {
  const layout = compileLayout(row.layoutDocument);
  const sources = new Map(layout.fields.map((field) => [field.name, field.source]));
  return {
    package: {
      id: row.packageId,
      version: row.version,
      state: row.state,
      digest: row.digest?.toString("hex") ?? "",
      firmware: row.firmware,
      builtAt: row.builtAt.toISOString(),
      builder: row.builder,
    },
    image: {
      sha256: row.sha256.toString("hex"),
      hex: row.bytes.toString("hex"),
      hardwareId: row.hardwareId,
      fill: layout.fill,
      kept: layout.kept,
      fields: decodeImage(layout, row.bytes).map((field) => ({ ...field, source: sources.get(field.name) ?? null })),
    },
    layout: { version: row.layoutVersion, sha256: row.layoutSha256?.toString("hex") ?? "" },
    revision: { number: row.revisionNumber, sha256: row.revisionSha256?.toString("hex") ?? "" },
    derivation: {
      id: row.derivationId,
      method: row.method,
      order: row.fitOrder,
      sha256: row.derivationSha256.toString("hex"),
      engine: row.engine,
      role: row.role,
      state: row.setState,
      provenRange: row.provenLowC === null || row.provenHighC === null ? null : [row.provenLowC, row.provenHighC],
      derivedAt: row.derivedAt.toISOString(),
      deriver: row.deriver,
    },
  };
}

async function signaturesOf(ctx: PersonCtx, row: ImageOriginRow): Promise<DeviceOrigin["signatures"]> {
  const what: Record<string, string> = {
    [row.revisionId]: `Family revision ${row.revisionNumber}`,
    [row.layoutId]: `Layout ${row.layoutVersion}`,
    [row.derivationId]: "Coefficients",
    [row.packageId]: `Package ${row.version}`,
  };
  const signatures = await listSignatures(ctx.db, Object.keys(what));
  return signatures.map(({ subjectId, name, meaning, at }) => ({
    what: what[subjectId] ?? subjectId,
    name,
    meaning,
    at: at.toISOString(),
  }));
}
