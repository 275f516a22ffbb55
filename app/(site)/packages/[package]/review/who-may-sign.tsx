import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Notice } from "@/app/_components/notice";
import type { PackageView } from "@/schemas/api/packages";
import type { MakerActs } from "./page";

export interface WhoMaySignProps {
  view: PackageView;
  me: string;
  makers: readonly MakerActs[];
}

/** Who may sign a package and who may not, with what stands against it. */
export function WhoMaySign({ view, me, makers }: WhoMaySignProps) {
  const waits = view.state === "draft" || view.state === "in-review";
  const mine = waits && view.isMaker ? makers.find((maker) => maker.name === me) : undefined;
  return (
    <Card title={waits ? "Who may sign it" : "Who had a hand in it"}>
      <div className="flex flex-col gap-2 text-sm">
        {view.state === "draft" ? <p>Nobody has asked for its review yet.</p> : null}
        {waits && view.reviewers.length > 0 ? <p className="font-semibold">{view.reviewers.join(", ")}</p> : null}
        {waits && view.reviewers.length === 0 ? (
          <Notice tone="bad" title="Nobody is left who may">
            Every reviewer had a hand in it. An admin can give another person the role under{" "}
            <Link href="/people">People</Link>.
          </Notice>
        ) : null}
        {mine ? <p className="text-ochre">You can't: you {mine.acts.join(", ")}.</p> : null}
        <ul className="text-ink-soft">
          {makers
            .filter((maker) => maker !== mine)
            .map((maker) => (
              <li key={maker.name}>
                {maker.name}: {maker.acts.join(", ")}
              </li>
            ))}
        </ul>
        {view.submittedBy && view.state === "in-review" ? (
          <p className="text-ink-soft">Asked for by {view.submittedBy}, who can take it back.</p>
        ) : null}
      </div>
    </Card>
  );
}
