import type { Metadata } from "next";
import Link from "next/link";
import { notFound } from "next/navigation";
import { Card } from "@/app/_components/card";
import { CopyButton } from "@/app/_components/copy-button";
import { Digest } from "@/app/_components/digest";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { canonicalEvent } from "@/lib/domain/ledger/ledger-event";
import { pageContext } from "@/lib/http/page-context";
import { getHead, listEntries } from "@/lib/services/ledger/list-events";

interface PageProps {
  params: Promise<{ seq: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Event ${(await params).seq}` };
}

/** One event, as it is hashed. */
export default async function EventPage({ params }: PageProps) {
  const ctx = await pageContext();
  const seq = Number((await params).seq);
  if (!Number.isSafeInteger(seq) || seq < 1) notFound();
  const [entry] = (await listEntries(ctx, { cursor: seq - 1, order: "asc", limit: 1 })).items;
  if (entry?.seq !== seq) notFound();
  const { hash, actorName, texts, ...content } = entry;
  const canonical = canonicalEvent(content);
  const head = await getHead(ctx);
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Ledger", href: "/ledger" }, { name: `Event ${formatCount(seq)}` }]}
        title={entry.action}
        note={
          <>
            <TimeText at={entry.at} /> · {actorName ?? entry.actor}
          </>
        }
        actions={
          <span className="flex gap-4 text-sm">
            {seq > 1 ? <Link href={`/ledger/${seq - 1}`}>Event before</Link> : null}
            {seq < head.seq ? <Link href={`/ledger/${seq + 1}`}>Event after</Link> : null}
          </span>
        }
      />
      <div className="grid grid-cols-1 items-start gap-[18px] lg:grid-cols-2">
        <Card title="What happened">
          <dl className="grid grid-cols-[auto_1fr] gap-x-5 gap-y-1.5 text-sm">
            <dt className="text-ink-soft">To what</dt>
            <dd className="min-w-0 font-mono wrap-anywhere">
              <Link href={`/ledger?subject=${encodeURIComponent(entry.subject)}`}>{entry.subject}</Link>
            </dd>
            <dt className="text-ink-soft">By</dt>
            <dd>{actorName ?? <span className="font-mono wrap-anywhere">{entry.actor}</span>}</dd>
            {texts.map((text) => (
              <Text key={text.name} name={text.name} content={text.content} />
            ))}
          </dl>
          <pre className="mt-3 max-h-[480px] overflow-auto rounded bg-sunk p-3 font-mono text-xs whitespace-pre-wrap wrap-anywhere">
            {JSON.stringify(entry.data, null, 2)}
          </pre>
        </Card>
        <Card title="As it is hashed" aside={<CopyButton text={canonical} name="event as hashed" />}>
          <pre className="max-h-[480px] overflow-auto rounded bg-sunk p-3 font-mono text-xs whitespace-pre-wrap wrap-anywhere">
            {canonical}
          </pre>
          <dl className="mt-3 grid gap-y-2 text-sm">
            <div>
              <dt className="text-xs text-ink-soft">SHA-256 of this text</dt>
              <dd>
                <Digest value={hash} name="hash of the event" />
              </dd>
            </div>
            <div>
              <dt className="text-xs text-ink-soft">previous, the hash of the event before</dt>
              <dd>
                <Digest value={entry.previous} name="previous hash" />
              </dd>
            </div>
          </dl>
        </Card>
      </div>
    </>
  );
}

function Text({ name, content }: { name: string; content: string | null }) {
  return (
    <>
      <dt className="text-ink-soft">{name}</dt>
      <dd className="min-w-0 wrap-anywhere">
        {content ?? <span className="text-ink-soft">erased; its salted hash stays in the chain</span>}
      </dd>
    </>
  );
}
