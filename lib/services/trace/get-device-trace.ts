import { getDevice, listDeviceEvents } from "@/db/queries/device-events";
import { listApprovalsOfDevice } from "@/db/queries/device-origin";
import * as query from "@/db/queries/trace";
import { type ListedWrite, listWritesOfSerial } from "@/db/queries/writes";
import { READERS } from "@/lib/domain/roles";
import type { Ctx } from "@/lib/services/context";
import { type Carried, listCarriedImages } from "@/lib/services/devices/carried-image";
import type { DeviceTrace, HistoryEntry } from "@/schemas/api/devices";

/**
 * What a serial carries, where that came from, and everything that happened to it. Who is no reader, as an operator, sees what
 * was written, what happened to the device and what was released, and no work in progress.
 * @throws AppError `device.not_found`
 */
export async function getDeviceTrace(ctx: Ctx, serial: string): Promise<DeviceTrace> {
  const device = await getDevice(ctx.db, serial);
  const [carried] = await listCarriedImages(ctx, { lotId: device.lotId, serial, limit: 1 });
  const sets = await query.listSetsOfDevice(ctx.db, device.id);
  const { actor } = ctx;
  const readsAll = actor.kind === "person" && READERS.some((role) => actor.roles.includes(role));
  const newest = sets.find((set) => set.state !== null);
  const history = await releasedHistory(ctx, device.id, serial);
  if (readsAll) history.push(...(await workHistory(ctx, device.id, sets)));
  return {
    serial,
    lot: device.lot,
    family: device.family,
    state: stateOf(device, carried),
    held: device.held,
    scrapped: device.scrapped,
    shipped: device.shipped,
    hardwareId: device.hardwareId,
    firmware: device.firmware ?? device.lotFirmware,
    current: carried ? currentOf(carried) : null,
    coefficients: newest && (readsAll || newest.state === "approved") ? coefficientsOf(newest) : null,
    history: history.sort((a, b) => b.at.localeCompare(a.at)),
  };
}

async function releasedHistory(ctx: Ctx, deviceId: string, serial: string): Promise<HistoryEntry[]> {
  const writes = await listWritesOfSerial(ctx.db, serial);
  const events = await listDeviceEvents(ctx.db, deviceId);
  const periods = await query.listLivePeriodsOfDevice(ctx.db, deviceId);
  return [...writes.map(writeEntry), ...events.map(eventEntry), ...periods.map(periodEntry)];
}

async function workHistory(ctx: Ctx, deviceId: string, sets: readonly SetRow[]): Promise<HistoryEntry[]> {
  const runs = await query.listRunsOfDevice(ctx.db, deviceId);
  const approvals = await listApprovalsOfDevice(ctx.db, deviceId);
  const derived = sets.filter((set) => set.state !== null).map(setEntry);
  return [...runs.map(runEntry), ...derived, ...approvals.map(approvalEntry)];
}

function currentOf({ last, known, live, sameValuesAsLive }: Carried): DeviceTrace["current"] {
  if (!last) return null;
  return {
    package: last.packageId,
    version: last.version,
    imageSha256: last.imageSha256,
    writtenAt: last.finishedAt,
    station: last.station,
    outcome: last.outcome,
    known,
    live,
    sameValuesAsLive,
  };
}

function coefficientsOf(set: SetRow): DeviceTrace["coefficients"] {
  return { derivation: set.derivationId, state: set.state as string, role: set.role, values: valuesOf(set) };
}

function stateOf(device: { held: boolean; scrapped: boolean }, carried: Carried | undefined): DeviceTrace["state"] {
  if (device.scrapped) return "scrapped";
  if (device.held) return "held";
  if (!carried?.last) return "never-written";
  if (!carried.known) return "unknown";
  if (carried.live) return "carries-live";
  if (carried.sameValuesAsLive === null) return "carries-unreleased";
  return carried.sameValuesAsLive ? "carries-live-values" : "carries-other-values";
}

type SetRow = Awaited<ReturnType<typeof query.listSetsOfDevice>>[number];

function valuesOf(set: SetRow): Record<string, number | null> {
  const { tempOffset, tempSlope, zero, zeroTc, zeroTc2, gain, gainTc, gainTc2 } = set;
  const first = { tempOffset, tempSlope, zero, zeroTc, gain, gainTc };
  return zeroTc2 === null && gainTc2 === null ? first : { ...first, zeroTc2, gainTc2 };
}

const WRITTEN: Record<string, [string, HistoryEntry["tone"]]> = {
  verified: ["Written and verified", "good"],
  mismatch: ["Read back differs", "bad"],
  failed: ["Writing failed", "bad"],
  interrupted: ["Writing interrupted", "bad"],
  "unknown-image": ["Written with bytes of no known image", "bad"],
  "unknown-serial": ["Reported before the serial was known", "wait"],
};

function writeEntry(row: ListedWrite): HistoryEntry {
  const [what, tone] = WRITTEN[row.outcome] ?? [row.outcome, "info"];
  const flags = row.flags.length > 0 ? `flagged ${row.flags.join(", ")}` : null;
  return {
    at: row.finishedAt.toISOString(),
    kind: "written",
    what: row.version ? `${what}, ${row.version}` : what,
    tone: tone === "good" && flags ? "wait" : tone,
    who: `${row.operator}, ${row.station}`,
    detail: [row.detail, flags].filter(Boolean).join(" · ") || null,
    link: row.packageId ? `/packages/${row.packageId}` : null,
  };
}

const EVENT: Record<string, [string, HistoryEntry["tone"]]> = {
  hold: ["Held", "bad"],
  resume: ["Going on after the hold", "good"],
  scrap: ["Scrapped", "bad"],
  rework: ["Reworked", "info"],
  "board-replaced": ["Board replaced: what was written before no longer counts", "wait"],
  firmware: ["Firmware changed", "info"],
  shipped: ["Shipped", "info"],
  returned: ["Came back", "wait"],
};

function eventEntry(row: Awaited<ReturnType<typeof listDeviceEvents>>[number]): HistoryEntry {
  const [what, tone] = EVENT[row.kind] ?? [row.kind, "info"];
  const facts = [
    row.reason,
    row.reference,
    row.hardwareId && `board ${row.hardwareId}`,
    row.firmware && `firmware ${row.firmware}`,
  ];
  return {
    at: row.at.toISOString(),
    kind: "event",
    what,
    tone,
    who: row.person,
    detail: facts.filter(Boolean).join(" · "),
    link: null,
  };
}

function runEntry(row: Awaited<ReturnType<typeof query.listRunsOfDevice>>[number]): HistoryEntry {
  const range =
    row.highC - row.lowC < 1 ? `${row.lowC.toFixed(1)} °C` : `${row.lowC.toFixed(1)} to ${row.highC.toFixed(1)} °C`;
  const what = `${row.purpose[0]?.toUpperCase()}${row.purpose.slice(1)} run, ${range}`;
  return {
    at: row.at.toISOString(),
    kind: "run",
    what,
    tone: "info",
    who: row.person,
    detail: row.loaded ? "loaded and unloaded" : "unloaded only",
    link: `/runs/${row.id}`,
  };
}

const SET_NOW: Record<string, string> = {
  approved: "approved since",
  proposed: "not decided yet",
  refused: "refused since",
  stale: "stale since: its run was superseded or its family revision left",
  revoked: "revoked since",
};

function setEntry(row: SetRow): HistoryEntry {
  const state = row.state as string;
  return {
    at: row.createdAt.toISOString(),
    kind: "coefficients",
    what: row.method === "import" ? "Coefficients imported" : "Coefficients derived",
    tone: state === "revoked" || state === "refused" ? "bad" : state === "stale" ? "wait" : "info",
    who: row.person,
    detail: `${row.method}, as ${row.role}, ${SET_NOW[state] ?? state}`,
    link: `/derivations/${row.derivationId}`,
  };
}

function approvalEntry(row: Awaited<ReturnType<typeof listApprovalsOfDevice>>[number]): HistoryEntry {
  const packed = row.subjectKind === "package";
  return {
    at: new Date(row.at).toISOString(),
    kind: "approved",
    what: packed ? `Package ${row.version} approved` : "Coefficients approved",
    tone: "good",
    who: row.name,
    detail: row.meaning,
    link: packed ? `/packages/${row.subjectId}` : `/derivations/${row.subjectId}`,
  };
}

function periodEntry(row: Awaited<ReturnType<typeof query.listLivePeriodsOfDevice>>[number]): HistoryEntry {
  const verb = { release: "released", reinstatement: "made live again", withdrawal: "withdrawn" }[row.kind] ?? row.kind;
  return {
    at: row.startedAt.toISOString(),
    kind: "live",
    what: `Release ${row.version} ${verb}`,
    tone: row.kind === "withdrawal" ? "bad" : "good",
    who: row.person,
    detail: row.reason,
    link: `/packages/${row.packageId}`,
  };
}
