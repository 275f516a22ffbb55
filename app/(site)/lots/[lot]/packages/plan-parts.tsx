import Link from "next/link";
import { StateMark } from "@/app/_components/state/state-mark";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import type { PlannedContent, Signer } from "@/lib/services/packages/plan-package";
import { leftOutWords } from "../../../packages/left-out-words";
import { actWords } from "../../../packages/maker-acts";

/** Which devices a package would hold if it were built now, and why the others are left out. */
export function WouldPack({ content, devices, lot }: { content: PlannedContent; devices: number; lot: string }) {
  const { packed, leftOut, newerUndecided, otherBoard } = content;
  return (
    <section>
      <h3 className="mb-1 text-sm">What would be packed</h3>
      <p className="flex flex-wrap items-baseline gap-x-3">
        <StateMark
          tone={packed === devices ? "good" : packed === 0 ? "bad" : "caution"}
          word={`${formatCount(packed)} of ${formatNumberOf(devices, "device")}`}
        />
        <Link href={`/lots/${encodeURIComponent(lot)}/coefficients`}>their coefficients</Link>
      </p>
      <ul className="mt-1.5 flex flex-col gap-1">
        {leftOut.map(({ reason, count, serials }) => (
          <li key={reason}>
            <span className="font-semibold">{formatCount(count)} left out</span>, {leftOutWords[reason] ?? reason}:{" "}
            <span className="font-mono text-xs">{serials.join(", ")}</span>
            {count > serials.length ? ` and ${formatCount(count - serials.length)} more` : ""}
          </li>
        ))}
        {newerUndecided > 0 ? (
          <li>
            {formatNumberOf(newerUndecided, "device has", "devices have")} newer coefficients that wait for a decision;
            the approved ones are packed.
          </li>
        ) : null}
        {otherBoard > 0 ? (
          <li>
            {formatNumberOf(otherBoard, "device carries", "devices carry")} another board than the one that was
            measured.
          </li>
        ) : null}
      </ul>
      {leftOut.length + newerUndecided + otherBoard > 0 ? (
        <p className="mt-1.5 text-ink-soft">
          The check of coverage warns of it: a reviewer waives that before the review.
        </p>
      ) : null}
    </section>
  );
}

/** Who could still sign the package: reviewers who had no hand in what it is made of. */
export function Signers({ signers }: { signers: readonly Signer[] }) {
  const free = signers.filter((signer) => signer.acts.length === 0);
  const bound = signers.filter((signer) => signer.acts.length > 0);
  return (
    <section>
      <h3 className="mb-1 text-sm">Who may sign it then</h3>
      {free.length > 0 ? (
        <p className="flex flex-wrap items-baseline gap-x-3">
          <StateMark tone={free.length > 1 ? "good" : "caution"} word={formatNumberOf(free.length, "reviewer")} />
          <span>{free.map((signer) => signer.name).join(", ")}</span>
        </p>
      ) : (
        <p>
          <StateMark tone="bad" word="nobody" />{" "}
          <span className="text-ink-soft">
            Let somebody else build it, or ask an admin for another reviewer: it could not be released.
          </span>
        </p>
      )}
      {free.length === 1 ? <p className="text-ink-soft">Nobody stands in for this one person.</p> : null}
      {bound.length > 0 ? (
        <ul className="mt-1 text-ink-soft">
          {bound.map((signer) => (
            <li key={signer.name}>
              {signer.name} can't: {signer.acts.map(actWords).join(", ")}
            </li>
          ))}
        </ul>
      ) : null}
    </section>
  );
}
