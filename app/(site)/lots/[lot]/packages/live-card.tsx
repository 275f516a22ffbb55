import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FirstOffState } from "@/app/_components/first-off";
import { SealMark } from "@/app/_components/seal-mark";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { PackageSummary } from "@/schemas/api/packages";
import type { FirstOff } from "@/schemas/api/proofs";

/** What stations write now, with its seal; or that nothing is live. */
export function LiveCard({
  lot,
  live,
  any,
  proof,
}: {
  lot: string;
  live: PackageSummary | null;
  any: boolean;
  /** What proof runs show of its layout and firmware. */
  proof: FirstOff | null;
}) {
  if (!live?.digest) {
    return any ? (
      <Card title="Nothing is live">
        <p className="text-sm text-ink-soft">
          Stations write no device of this lot. A package goes live by a second person's approval and its release.
        </p>
      </Card>
    ) : null;
  }
  const path = encodeURIComponent(lot);
  return (
    <Card title="Live now" look="sealed" aside={<Link href={`/packages/${live.id}/record`}>Release record</Link>}>
      <div className="flex flex-wrap items-center justify-between gap-x-8 gap-y-4">
        <SealMark
          digest={live.digest}
          above={
            <>
              <Link href={`/packages/${live.id}`}>Release {live.version}</Link>, sequence {live.sequence},{" "}
              {formatNumberOf(live.counts.devices, "device")}
            </>
          }
        />
        <div className="flex flex-wrap gap-2.5">
          <LinkButton href={`/lots/${path}/writes`}>What was written</LinkButton>
          <LinkButton href={`/lots/${path}/writes#rewrites`}>Re-write list</LinkButton>
        </div>
      </div>
      {proof ? (
        <div className="mt-4 border-t border-rule pt-3">
          <FirstOffState proof={proof} lot={lot} />
        </div>
      ) : null}
    </Card>
  );
}
