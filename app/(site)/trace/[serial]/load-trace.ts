import { orNotFound } from "@/lib/http/page-context";
import type { PersonCtx } from "@/lib/services/context";
import { getDerivedDevice } from "@/lib/services/derivations/get-derivation";
import { findDeviceProof } from "@/lib/services/proofs/find-device-proof";
import type { JudgedDevice } from "@/lib/services/proofs/judge-proof-run";
import { type DeviceOrigin, getDeviceOrigin } from "@/lib/services/trace/get-device-origin";
import { getDeviceTrace } from "@/lib/services/trace/get-device-trace";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";
import type { DeviceTrace } from "@/schemas/api/devices";

export interface LoadedTrace {
  trace: DeviceTrace;
  origin: DeviceOrigin | null;
  /** How the coefficients of its image were derived; null where it has no image. */
  derived: DerivedDeviceDetail | null;
  /** The newest proof run that could judge it. */
  proof: JudgedDevice | null;
}

/** What the page and the printed record of a serial show; the not-found page where there is no such serial. */
export async function loadTrace(ctx: PersonCtx, address: string): Promise<LoadedTrace> {
  const serial = decodeURIComponent(address).trim().toUpperCase();
  const trace = await orNotFound(getDeviceTrace(ctx, serial));
  const carried = trace.current?.known ? trace.current.package : null;
  const origin = await getDeviceOrigin(ctx, { serial, carried });
  const derived = origin ? await getDerivedDevice(ctx, origin.derivation.id, serial) : null;
  const proof = (await findDeviceProof(ctx, serial)) ?? null;
  return { trace, origin, derived, proof };
}
