import { Card } from "@/app/_components/card";
import { SealMark } from "@/app/_components/seal-mark";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { formatDateTime } from "@/lib/domain/format/time";
import type { DeviceOrigin } from "@/lib/services/trace/get-device-origin";
import type { DeviceTrace } from "@/schemas/api/devices";

/** What the device carries, by its deciding write record, with the seal of the package it belongs to. */
export function CarriedCard({ trace, origin }: { trace: DeviceTrace; origin: DeviceOrigin | null }) {
  const { current } = trace;
  if (!current) {
    return (
      <Card title="Nothing written yet" look="caution">
        <p className="text-sm text-ink-soft">No station has reported a write of this device. {nextStep(origin)}</p>
      </Card>
    );
  }
  if (!current.known || !origin || origin.basis !== "carried") {
    return (
      <Card title="What it carries is not known" look="bad">
        <p className="text-sm">
          <StateMark {...stateOf("write-outcome", current.outcome)} /> {formatDateTime(current.writtenAt)},{" "}
          {current.station}
          {current.version ? `, ${current.version}` : ""}.
        </p>
        <p className="mt-2 text-sm text-ink-soft">
          {whyUnknown(current.outcome)} {nextStep(origin)}
        </p>
      </Card>
    );
  }
  const released = origin.package.state !== "draft" && origin.package.state !== "in-review";
  return (
    <Card look={current.live || current.sameValuesAsLive ? "sealed" : "caution"}>
      <SealMark
        digest={origin.package.digest}
        above={`${released ? "Release" : "Package"} ${origin.package.version}${current.live ? "" : `, ${origin.package.state.replaceAll("-", " ")}`}`}
        below={`written ${formatDateTime(current.writtenAt)}, ${current.station}, read back equal`}
      />
      {current.live ? null : <p className="mt-3 text-sm">{againstLive(current.sameValuesAsLive)}</p>}
    </Card>
  );
}

function againstLive(same: boolean | null): string {
  if (same === null)
    return "There is no live release to compare it with: nothing is live for the lot, or the live release has no image of this device.";
  return same
    ? "Equal to the live release in every value; only version numbers and the checksums over them differ. It need not be written again."
    : "Its values differ from those of the live release. It stands on the lot's re-write list.";
}

function whyUnknown(outcome: string): string {
  if (outcome === "verified")
    return "The board was replaced after this write, so what was written before no longer counts.";
  if (outcome === "mismatch") return "What was read back differed from what should have been there.";
  if (outcome === "interrupted") return "The write was interrupted: the memory may hold old, new or mixed bytes.";
  return "The bytes reported are those of no image known here.";
}

function nextStep(origin: DeviceOrigin | null): string {
  return origin
    ? `The live release ${origin.package.version} holds an image of it: write that and read it back.`
    : "No live release holds an image of it.";
}
