import Link from "next/link";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Select } from "@/app/_components/form/select";
import { Notice } from "@/app/_components/notice";
import type { PersonCtx } from "@/lib/services/context";
import { listFamilies } from "@/lib/services/families/get-family";
import { compareLayouts } from "@/lib/services/layouts/compare-layouts";
import { listLayouts } from "@/lib/services/layouts/get-layout";
import type { Chosen } from "./chosen";
import { comparedOrWhy } from "./compare-packages";

/** Two layouts of a family: each difference with the step that it asks for. */
export async function CompareLayouts({ ctx, chosen }: { ctx: PersonCtx; chosen: Chosen }) {
  const families = (await listFamilies(ctx, { limit: 1_000 })).items.map(({ code }) => ({ value: code, name: code }));
  const family = families.find((one) => one.value === chosen.family?.toUpperCase())?.value;
  const layouts = family === undefined ? [] : (await listLayouts(ctx, { family, limit: 200 })).items;
  const options = layouts.map((one) => ({
    value: one.version,
    name: `${one.version}, ${one.state.replace("-", " ")}`,
  }));
  const { fromLayout: from, toLayout: to } = chosen;
  return (
    <>
      <Card>
        <form action="/compare" className="flex flex-col gap-4">
          <input type="hidden" name="kind" value="layouts" />
          <div className="grid items-start gap-4 md:grid-cols-3">
            <Select
              label="Family"
              name="family"
              defaultValue={family}
              options={families}
              placeholder="Choose a family"
              required
            />
            {options.length > 0 ? (
              <>
                <Select
                  label="Older layout"
                  name="fromLayout"
                  defaultValue={from ?? options[1]?.value ?? options[0]?.value}
                  options={options}
                />
                <Select label="Newer layout" name="toLayout" defaultValue={to ?? options[0]?.value} options={options} />
              </>
            ) : null}
          </div>
          {family !== undefined && options.length === 0 ? (
            <p className="text-sm text-ink-soft">{family} has no layout yet.</p>
          ) : null}
          <div>
            <Button type="submit" look="outline">
              {family === undefined ? "Show its layouts" : "Compare"}
            </Button>
          </div>
        </form>
      </Card>
      {family && from && to ? <Result ctx={ctx} family={family} from={from} to={to} /> : null}
    </>
  );
}

async function Result({ ctx, family, from, to }: { ctx: PersonCtx; family: string; from: string; to: string }) {
  const found = await comparedOrWhy(compareLayouts(ctx, { family, from, to }));
  if (typeof found === "string") return <Notice title="These can't be compared">{found}</Notice>;
  const address = (version: string) => `/families/${encodeURIComponent(family)}/layouts/${version}`;
  return (
    <Card
      title={
        <>
          From <Link href={address(found.from)}>{found.from}</Link> to <Link href={address(found.to)}>{found.to}</Link>:{" "}
          {found.changes.length === 0 ? "nothing" : found.step}
        </>
      }
      note="The smallest step that the differences allow"
    >
      {found.changes.length === 0 ? (
        <p className="text-sm text-ink-soft">Nothing but the version differs.</p>
      ) : (
        <ul>
          {found.changes.map((change) => (
            <li
              key={change.path + change.message}
              className="flex flex-wrap items-baseline gap-x-4 border-b border-rule/55 py-1.5 text-sm last:border-0"
            >
              <span className="w-16 flex-none font-semibold">{change.step}</span>
              <span className="min-w-0 flex-1">{change.message}</span>
              <span className="font-mono text-xs text-ink-soft">{change.path}</span>
            </li>
          ))}
        </ul>
      )}
    </Card>
  );
}
