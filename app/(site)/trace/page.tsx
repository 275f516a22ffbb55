import type { Metadata } from "next";
import Link from "next/link";
import { redirect } from "next/navigation";
import { Card } from "@/app/_components/card";
import { TitleRow } from "@/app/_components/title-row";
import { READERS, ROLES } from "@/lib/domain/roles";
import { holds, pageContext } from "@/lib/http/page-context";
import { search } from "@/lib/services/today/search";
import type { SearchItem } from "@/schemas/api/today";
import { DumpCheck } from "./dump-check";
import { RecentSerials } from "./recent-serials";
import { SerialField } from "./serial-field";

export const metadata: Metadata = { title: "Trace" };

interface PageProps {
  searchParams: Promise<{ q?: string }>;
}

const HITS_MAX = 30;

/** Where a serial is looked up: typed, scanned or pasted, or found by what its memory holds. */
export default async function TracePage({ searchParams }: PageProps) {
  const ctx = await pageContext(ROLES);
  const asked = (await searchParams).q?.trim().slice(0, 80) ?? "";
  const hits = asked ? await search(ctx, { q: asked, limit: HITS_MAX }) : [];
  const reader = holds(ctx, ...READERS);
  // One thing named exactly is what was meant. Packages are no pages of operators.
  const named = hits.filter((hit) => hit.exact && (reader || hit.kind === "device"));
  if (named.length === 1 && named[0]) redirect(named[0].link);
  const mayCheck = holds(ctx, "engineer", "reviewer", "service");
  return (
    <>
      <TitleRow
        title="Trace"
        note="What a serial carries, who approved it, and the readings it came from"
        actions={
          reader ? (
            <Link href="/trace/impact" className="text-sm">
              The other way round: what did one thing reach?
            </Link>
          ) : undefined
        }
      />
      <div className="grid grid-cols-1 items-start gap-[18px] lg:grid-cols-2">
        <div className="flex min-w-0 flex-col gap-[18px]">
          <Card>
            <SerialField asked={asked} />
          </Card>
          {asked ? <Hits asked={asked} hits={hits} linked={reader} /> : null}
          <Card title="Looked up last" note="kept in this browser only">
            <RecentSerials />
          </Card>
        </div>
        {mayCheck ? (
          <Card title="Check a dump without a serial" note="says whose image it is">
            <DumpCheck />
          </Card>
        ) : null}
      </div>
    </>
  );
}

const kinds: Record<SearchItem["kind"], string> = {
  device: "device",
  lot: "lot",
  family: "family",
  package: "package",
};

function Hits({ asked, hits, linked }: { asked: string; hits: readonly SearchItem[]; linked: boolean }) {
  if (hits.length === 0)
    return (
      <Card title="Nothing found" look="caution">
        <p className="text-sm text-ink-soft">
          Nothing here is called <span className="font-mono wrap-anywhere text-ink">{asked}</span>. Compare 0 with O and
          1 with I, or type only a part of it.
        </p>
      </Card>
    );
  return (
    <Card title="Found" note={`with “${asked}” in it${hits.length === HITS_MAX ? `, the first ${HITS_MAX}` : ""}`}>
      <ul>
        {hits.map((hit) => (
          <li
            key={hit.link}
            className="flex flex-wrap items-baseline gap-x-3 border-b border-rule/55 py-1.5 last:border-0"
          >
            {linked || hit.kind === "device" ? (
              <Link href={hit.link} prefetch={false} className="font-mono">
                {hit.title}
              </Link>
            ) : (
              <span className="font-mono">{hit.title}</span>
            )}
            <span className="text-sm text-ink-soft">
              {kinds[hit.kind]}
              {hit.detail ? ` · ${hit.detail}` : ""}
            </span>
          </li>
        ))}
      </ul>
    </Card>
  );
}
