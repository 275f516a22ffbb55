import Link from "next/link";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { LayoutUse } from "@/lib/services/layouts/get-layout-use";

/** Lots with packages built from a layout, each with its live package. */
export function LayoutUses({ uses }: { uses: readonly LayoutUse[] }) {
  if (uses.length === 0) return <p className="py-1 text-sm text-ink-soft">No package was built from it.</p>;
  return (
    <ul className="text-sm">
      {uses.map(({ lot, firmware, packages, live }) => (
        <li key={lot} className="py-1">
          <Link href={`/lots/${lot}/packages`} className="font-mono">
            {lot}
          </Link>
          <span className="text-ink-soft"> (firmware {firmware}):</span> {formatNumberOf(packages, "package")}
          {live ? (
            <>
              , live{" "}
              <Link href={`/packages/${live.id}`} className="font-mono">
                {live.version}
              </Link>
            </>
          ) : null}
        </li>
      ))}
    </ul>
  );
}

/** What retiring does, with the lots that it touches by name. */
export function RetireWarning({ uses }: { uses: readonly LayoutUse[] }) {
  const live = uses.filter((use) => use.live !== null);
  const underWay = uses.filter((use) => use.underWay > 0);
  return (
    <>
      <p>No package can be built from it any more, and that can't be undone. What was built from it stays as it is.</p>
      {live.length > 0 ? (
        <p className="mt-2 font-semibold text-ochre">
          Live from it: {namesOf(live)}. Their next packages need another layout that their firmware reads.
        </p>
      ) : null}
      {underWay.length > 0 ? (
        <p className="mt-2">Packages under way from it can still go live: {namesOf(underWay)}.</p>
      ) : null}
    </>
  );
}

function namesOf(uses: readonly LayoutUse[]): string {
  const named = uses.slice(0, 8).map(({ lot, live }) => (live ? `${lot} (${live.version})` : lot));
  return uses.length > named.length ? `${named.join(", ")} and ${uses.length - named.length} more` : named.join(", ");
}
