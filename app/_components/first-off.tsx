import Link from "next/link";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import type { FirstOff } from "@/schemas/api/proofs";

/** What proof runs show about one layout read by one firmware: in one mark and the words that go with it. */
export function FirstOffState({ proof, lot }: { proof: FirstOff; lot: string }) {
  return (
    <div className="text-sm">
      <StateMark {...stateOf("proof", proof.state)} />
      <p className="mt-1 text-ink-soft">{proof.state === "open" ? <Open lot={lot} /> : <Judged proof={proof} />}</p>
    </div>
  );
}

function Open({ lot }: { lot: string }) {
  return (
    <>
      No proof run yet shows that this firmware reads this layout as meant. Write one device, read its output in the
      chamber and <Link href={`/lots/${encodeURIComponent(lot)}/readings`}>upload the proof run</Link> before the rest
      of the lot is written.
    </>
  );
}

function Judged({ proof }: { proof: FirstOff }) {
  const run = proof.run ? <Link href={`/runs/${proof.run}`}>Proof of {formatDateTime(proof.readAt)}</Link> : null;
  const largest = `largest difference ${formatFigure(proof.worstRatio, { digits: 2 })} of the limit`;
  if (proof.state === "differs") {
    return (
      <>
        {run}: the output of {formatNumberOf(proof.differed, "device")} is not what the image predicts, {largest}. Stop
        writing until it is known whether layout or firmware is wrong.
      </>
    );
  }
  return (
    <>
      {run}: {formatNumberOf(proof.agreed, "device")} as predicted, {largest}. Shown to be applied:{" "}
      {proof.shown.join(", ") || "nothing"}
      {proof.notShown.length > 0 ? `; not shown by these readings: ${proof.notShown.join(", ")}` : ""}.
    </>
  );
}
