import Link from "next/link";
import { Card } from "@/app/_components/card";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { formatFigure } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import type { ProofDevice } from "@/schemas/api/proofs";

export type DeviceProofView = ProofDevice & { run: string; readAt: string };

/** What a proof run showed of this device, and whether it still holds for the image it carries. */
export function ProofLine({
  proof,
  carried,
  linked,
}: {
  proof: DeviceProofView;
  carried: string | null;
  linked: boolean;
}) {
  const when = `Proof of ${formatDateTime(proof.readAt)}`;
  const worst = proof.worst;
  return (
    <Card title="Output against prediction">
      <StateMark {...stateOf("proof", proof.state)} />
      <p className="mt-1 text-sm text-ink-soft">
        {linked ? <Link href={`/runs/${proof.run}`}>{when}</Link> : when} with release {proof.version}, firmware{" "}
        {proof.firmware}
        {worst
          ? `: largest difference ${formatFigure(worst.differenceIntervals, { digits: 2, sign: "always" })} v where ±${formatFigure(worst.limitIntervals, { digits: 2 })} v are allowed`
          : ""}
        .{proof.imageSha256 === carried ? "" : " It was written anew since: the proof is of earlier bytes."}
      </p>
    </Card>
  );
}
