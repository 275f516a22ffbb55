import type { Metadata } from "next";
import Link from "next/link";
import type { ReactNode } from "react";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { TitleRow } from "@/app/_components/title-row";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatDate } from "@/lib/domain/format/time";
import { holds, pageContext } from "@/lib/http/page-context";
import type { PersonCtx } from "@/lib/services/context";
import { listToday } from "@/lib/services/today/list-today";
import type { Today, TodayItem } from "@/schemas/api/today";
import { ItemList } from "./item-list";

export const metadata: Metadata = { title: "Today" };

/** What waits for the person, what they wait for, what went wrong, and where each lot stands. */
export default async function TodayPage() {
  const ctx = await pageContext();
  const today = await listToday(ctx);
  const mine = today.decide.length + today.release.length + today.people.length + today.own.length;
  const trouble = [...today.trouble, ...today.held];
  return (
    <>
      <TitleRow
        title="Today"
        note={`${formatDate(ctx.now())} · ${mine === 0 ? "nothing waits for you" : `${formatNumberOf(mine, "thing waits", "things wait")} for you`}`}
      />
      <div className="grid grid-cols-1 items-start gap-[18px] lg:grid-cols-2">
        <div className="flex min-w-0 flex-col gap-[18px]">
          <Card title="Waits for you">
            {mine === 0 ? (
              <NothingWaits ctx={ctx} today={today} />
            ) : (
              <>
                <Part title="To decide" items={today.decide} />
                <Part title="Approved, to be made live" items={today.release} />
                <Part title="Roles to confirm" items={today.people} />
                <Part title="Your own drafts, and what came back" items={today.own} />
              </>
            )}
          </Card>
          {today.planned.length > 0 ? (
            <Card title="Planned runs" note="wait for the chamber and their readings">
              <Shortened items={today.planned} name="planned runs" />
            </Card>
          ) : null}
          {today.awaited.length > 0 ? (
            <Card title="You wait for" note="a second person has to decide">
              <ItemList items={today.awaited} />
            </Card>
          ) : null}
        </div>
        <div className="flex min-w-0 flex-col gap-[18px]">
          <Card
            title="Went wrong lately"
            note="writes of the last seven days that need a look, and what is held"
            look={trouble.length > 0 ? "bad" : "plain"}
          >
            {trouble.length === 0 ? (
              <p className="text-sm text-ink-soft">No mismatch, no flag, nothing held.</p>
            ) : (
              <Shortened items={today.held} name="held" />
            )}
            {trouble.length > 0 ? <Shortened items={today.trouble} name="write records" /> : null}
          </Card>
          <Card title="Lots and their next step" aside={<Link href="/lots">All lots</Link>}>
            {today.lots.length === 0 ? <NoLots ctx={ctx} /> : <ItemList items={today.lots} />}
          </Card>
        </div>
      </div>
    </>
  );
}

function Part({ title, items }: { title: string; items: readonly TodayItem[] }) {
  if (items.length === 0) return null;
  return (
    <section className="mt-3 first:mt-0">
      <h3 className="text-xs text-ink-soft">{title}</h3>
      <ItemList items={items} />
    </section>
  );
}

const shownAtOnce = 6;

/** The newest of a list; the rest behind a line that opens. */
function Shortened({ items, name }: { items: readonly TodayItem[]; name: string }) {
  if (items.length === 0) return null;
  const rest = items.slice(shownAtOnce);
  return (
    <>
      <ItemList items={items.slice(0, shownAtOnce)} />
      {rest.length > 0 ? (
        <details className="text-sm">
          <summary className="w-max py-1.5 text-slate hover:text-copper-strong">
            {rest.length} more {name}
          </summary>
          <ItemList items={rest} />
        </details>
      ) : null}
    </>
  );
}

/** Says what to do next by role, so that an empty day does not end here. */
function NothingWaits({ ctx, today }: { ctx: PersonCtx; today: Today }) {
  const [title, text, action] = nextFor(ctx, today);
  return (
    <EmptyState title={title} action={action}>
      {text}
    </EmptyState>
  );
}

function nextFor(ctx: PersonCtx, today: Today): [title: string, text: string, action: ReactNode] {
  if (holds(ctx, "engineer"))
    return today.lots.length === 0
      ? [
          "Begin with a family",
          "A family is a device type with its capacity, nominal output and test rules. Then come a layout and a lot.",
          <LinkButton key="a" href="/families" look="primary">
            Go to families
          </LinkButton>,
        ]
      : [
          "Nothing waits for you",
          "Upload readings to a lot, or plan the next one.",
          <LinkButton key="a" href="/lots" look="primary">
            Go to lots
          </LinkButton>,
        ];
  if (holds(ctx, "reviewer"))
    return [
      "Nothing waits for your signature",
      "Packages, coefficients, layouts and family revisions stand here as soon as an engineer asks for review. What you made yourself never does.",
      <LinkButton key="a" href="/lots">
        Look at lots
      </LinkButton>,
    ];
  if (holds(ctx, "service"))
    return [
      "Look up a serial",
      "Scan or type one, or drop in a dump read from a device.",
      <LinkButton key="a" href="/trace" look="primary">
        Go to trace
      </LinkButton>,
    ];
  if (holds(ctx, "admin"))
    return [
      "Nothing waits for you",
      "Roles that a second admin has to confirm stand here.",
      <LinkButton key="a" href="/people" look="primary">
        Go to people
      </LinkButton>,
    ];
  return [
    "Nothing waits for you",
    "The ledger holds everything that happened, and can be verified and exported.",
    <LinkButton key="a" href="/ledger" look="primary">
      Go to the ledger
    </LinkButton>,
  ];
}

function NoLots({ ctx }: { ctx: PersonCtx }) {
  return (
    <EmptyState
      title="No lots yet"
      action={
        holds(ctx, "engineer") ? (
          <LinkButton href="/lots/new" look="primary">
            Add a lot
          </LinkButton>
        ) : undefined
      }
    >
      A lot is a production batch of one family, with its serials.
    </EmptyState>
  );
}
