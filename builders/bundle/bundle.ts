import { AppError } from "@/lib/errors";

/** Devices that a lot's bundle can hold (contract, section 5). */
export const BUNDLE_DEVICES_MAX = 60_000;

/** Path of a device's HEX file in the bundle. */
export function hexPath(serial: string): string {
  return `images/${serial}.hex`;
}

/** @throws AppError `bundle.too_many_devices` {devices, limit} */
export function assertDevicesFit(devices: number): void {
  if (devices <= BUNDLE_DEVICES_MAX) return;
  const message = `A bundle holds ${BUNDLE_DEVICES_MAX} devices, not ${devices}: split the lot`;
  throw new AppError("bundle.too_many_devices", { devices, limit: BUNDLE_DEVICES_MAX, message });
}
