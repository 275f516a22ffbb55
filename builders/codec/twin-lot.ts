import type { TwinErrors, TwinSpan, TwinZero } from "@/builders/codec/twin-errors";

/** What the twin says of a whole lot. */
export interface TwinLot {
  /** Devices looked at. */
  devices: number;
  /** Devices with a loaded reading: their span was tested. */
  spanTested: number;
  /** Devices with unloaded readings at two temperatures or more. */
  zeroTested: number;
  /** Devices with readings of which none is loaded. */
  neverLoaded: number;
  withoutReadings: number;
  /** Worst device and temperature against the envelope. */
  span: (TwinSpan & { serial: string }) | null;
  zero: (TwinZero & { serial: string }) | null;
  /** The largest part of a span error that rounding makes, sign-free. */
  rounding: { serial: string; ppm: number } | null;
}

/** Gathers {@link TwinErrors} of one device after the other; holds nothing but the extremes. */
export class TwinLotCounter {
  readonly #lot: TwinLot = {
    devices: 0,
    spanTested: 0,
    zeroTested: 0,
    neverLoaded: 0,
    withoutReadings: 0,
    span: null,
    zero: null,
    rounding: null,
  };

  /** @param errors null for a device that has no readings. */
  add(serial: string, errors: Pick<TwinErrors, "span" | "zero"> | null): void {
    const lot = this.#lot;
    lot.devices++;
    if (errors === null) {
      lot.withoutReadings++;
      return;
    }
    const { span, zero } = errors;
    if (span) lot.spanTested++;
    else lot.neverLoaded++;
    if (zero) lot.zeroTested++;
    if (span && span.ratio > (lot.span?.ratio ?? -1)) lot.span = { serial, ...span };
    if (zero && zero.ratio > (lot.zero?.ratio ?? -1)) lot.zero = { serial, ...zero };
    const ppm = span?.largestRoundingPpm ?? null;
    if (ppm !== null && ppm > (lot.rounding?.ppm ?? -1)) lot.rounding = { serial, ppm };
  }

  finish(): TwinLot {
    return this.#lot;
  }
}
