import { formatFigure } from "@/lib/domain/format/figure";
import type { DeviceOrigin } from "@/lib/services/trace/get-device-origin";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";
import type { DeviceTrace } from "@/schemas/api/devices";
import type { ProofDevice } from "@/schemas/api/proofs";

export interface LimitsInput {
  trace: DeviceTrace;
  origin: DeviceOrigin | null;
  derived: Pick<DerivedDeviceDetail, "gainFrom" | "role"> | null;
  proof: Pick<ProofDevice, "state" | "imageSha256" | "shown"> | null;
}

/** What no proof run of the bytes it carries showed; null where one showed all of it. */
function notProven({ trace, proof }: LimitsInput): string | null {
  if (proof?.state !== "agrees" || proof.imageSha256 !== trace.current?.imageSha256)
    return "That the firmware computes with these values as intended: only a proof run of the written device shows that.";
  const open = proof.shown.filter((one) => !one.shown).map((one) => one.name);
  return open.length > 0
    ? `That the firmware applies ${open.join(", ")}: the readings of its proof run could not have shown the difference.`
    : null;
}

/** What a trace does not show, in plain words: what nobody measured or reported is not known here. */
export function limitsOf({ trace, origin, derived, proof }: LimitsInput): string[] {
  const range = origin?.derivation.provenRange;
  const unproven = notProven({ trace, origin, derived, proof });
  return [
    "What the memory holds today: it tells what a station read back when it wrote. A dump read from the device tells the rest.",
    trace.hardwareId
      ? "That this board still sits on the cell that was measured. The hardware id tells the board, not the cell under it."
      : "That this board sits on the cell that was measured: no hardware id was ever reported, so a swapped board would not show.",
    ...(unproven ? [unproven] : []),
    ...(derived?.gainFrom === "sample-mean" ? ["Anything on its span: it was never loaded."] : []),
    ...(origin?.derivation.method === "pooled-gain" && derived?.role !== "sample"
      ? ["Its own gain over temperature: that is the lot's, taken over from the sample."]
      : []),
    range
      ? `Anything below ${formatFigure(range[0], { digits: 1 })} or above ${formatFigure(range[1], { digits: 1 })} °C, where nothing was measured.`
      : "Anything over temperature, as long as no proven range is known.",
    "Linearity, hysteresis and creep: they are not compensated.",
    "An accuracy class: that is proven by type approval and verification under the local rules, by the body licensed for it.",
  ];
}

export function Limits(props: LimitsInput) {
  return (
    <ul className="list-disc pl-5 text-sm text-ink-soft marker:text-ink-faint">
      {limitsOf(props).map((limit) => (
        <li key={limit} className="py-0.5">
          {limit}
        </li>
      ))}
    </ul>
  );
}
