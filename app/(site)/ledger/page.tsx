import type { Metadata } from "next";
import Form from "next/form";
import { Button, LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { Facts } from "@/app/_components/facts";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { DataTable } from "@/app/_components/table/data-table";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { pageContext } from "@/lib/http/page-context";
import { getHead } from "@/lib/services/ledger/list-events";
import { VerifyLedger } from "./verify-ledger";
import { WhatItProves } from "./what-it-proves";

export const metadata: Metadata = { title: "Ledger" };

/** Beginnings of actions, by what they are about. */
const subjects = [
  { value: "package.", name: "Packages" },
  { value: "reinstatement.", name: "Reinstatements" },
  { value: "derivation.", name: "Derivations" },
  { value: "coefficients.", name: "Coefficients" },
  { value: "run.", name: "Runs" },
  { value: "lot.", name: "Lots" },
  { value: "devices.", name: "Serials added" },
  { value: "device.", name: "Events of devices" },
  { value: "writes.", name: "Write records" },
  { value: "revision.", name: "Family revisions" },
  { value: "layout.", name: "Layouts" },
  { value: "equipment.", name: "Equipment" },
  { value: "station", name: "Stations and their keys" },
  { value: "person.", name: "People" },
];

interface PageProps {
  searchParams: Promise<Record<string, string | undefined>>;
}

/** Everything that happened, in the order in which it happened, each event sealed by the one after it. */
export default async function LedgerPage({ searchParams }: PageProps) {
  const ctx = await pageContext();
  const { action = "", subject = "", from = "", to = "" } = await searchParams;
  const head = await getHead(ctx);
  return (
    <>
      <TitleRow
        title="Ledger"
        note="Everything that happened, in its order; nothing in it can be changed"
        actions={
          <LinkButton href="/api/v1/ledger/export" download>
            Export all events
          </LinkButton>
        }
      />
      <div className="flex flex-col gap-[18px]">
        <div className="grid grid-cols-1 items-start gap-[18px] lg:grid-cols-2">
          <Card title="The chain">
            <Facts
              facts={[
                { value: formatCount(head.seq), label: "events" },
                { value: head.at ? <TimeText at={head.at} /> : "—", label: "the newest" },
              ]}
            />
            <p className="mt-3 mb-0.5 text-xs text-ink-soft">head: the hash of the newest event</p>
            <Digest value={head.hash} name="head of the ledger" />
            <div className="mt-4">
              <VerifyLedger />
            </div>
          </Card>
          <WhatItProves />
        </div>
        <Card title="Events">
          <Form action="/ledger" className="mb-4 flex flex-wrap items-end gap-x-4 gap-y-3">
            <div className="basis-[200px]">
              <Select label="About" name="action" defaultValue={action} placeholder="Everything" options={subjects} />
            </div>
            <div className="basis-[230px]">
              <TextInput label="Serial, code or id" name="subject" defaultValue={subject} code maxLength={200} />
            </div>
            <TextInput label="From" name="from" type="date" defaultValue={from} />
            <TextInput label="To" name="to" type="date" defaultValue={to} />
            <Button type="submit" look="outline">
              Show
            </Button>
            {action || subject || from || to ? <LinkButton href="/ledger">Show all</LinkButton> : null}
          </Form>
          <DataTable
            key={`${action} ${subject} ${from} ${to}`}
            name="events"
            endpoint={endpointOf({ action, subject, from, to })}
            rowKey="seq"
            rowHref="/ledger/{seq}"
            columns={[
              { key: "seq", header: "Place", format: { as: "count" }, align: "left" },
              { key: "at", header: "When", format: { as: "time" } },
              { key: "action", header: "What" },
              { key: "subject", header: "To what", format: { as: "code" } },
              { key: "actorName", header: "By" },
              { key: "hash", header: "Hash", format: { as: "digest" } },
              { key: "actor", header: "By, id", format: { as: "code" }, hidden: true },
              { key: "previous", header: "Previous", format: { as: "digest" }, hidden: true },
            ]}
            empty={
              action || subject || from || to
                ? { title: "No such event", text: "Nothing like that has happened. Take a filter away." }
                : {
                    title: "Nothing has happened yet",
                    text: "The first event is written with the first thing anybody does.",
                  }
            }
          />
        </Card>
      </div>
    </>
  );
}

function endpointOf({ action, subject, from, to }: Record<"action" | "subject" | "from" | "to", string>): string {
  const day = (text: string) => (/^\d{4}-\d{2}-\d{2}$/.test(text) ? text : "");
  const query = new URLSearchParams({
    ...(action && { action }),
    // Codes and serials are upper-case, ids and names of keys are not.
    ...(subject && {
      subject: /^[0-9a-f-]{36}$/i.test(subject) ? subject.toLowerCase() : subject.trim().toUpperCase(),
    }),
    ...(day(from) && { from: `${day(from)}T00:00:00.000Z` }),
    ...(day(to) && { to: `${day(to)}T23:59:59.999Z` }),
  });
  return `/api/v1/ledger/entries${query.size > 0 ? `?${query}` : ""}`;
}
