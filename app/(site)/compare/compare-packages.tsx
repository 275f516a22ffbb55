import Link from "next/link";
import { Card } from "@/app/_components/card";
import { ComparisonSummary } from "@/app/_components/difference/comparison-summary";
import { ComparisonView } from "@/app/_components/difference/comparison-view";
import { Notice } from "@/app/_components/notice";
import { SealMark } from "@/app/_components/seal-mark";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import { getLayout } from "@/lib/services/layouts/get-layout";
import { getPackageView } from "@/lib/services/packages/get-package";
import type { PackageView } from "@/schemas/api/packages";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { type Chosen, packageIdOf, serialOf } from "./chosen";
import { PackageChoice } from "./package-choice";

/** Two packages: who they are, counts, the serials that differ, and the bytes of one. */
export async function ComparePackages({ ctx, chosen }: { ctx: PersonCtx; chosen: Chosen }) {
  const from = packageIdOf(chosen.from);
  const to = packageIdOf(chosen.to);
  return (
    <>
      <PackageChoice ctx={ctx} chosen={chosen} kind="packages" />
      {from && to ? <Result ctx={ctx} from={from} to={to} serial={serialOf(chosen.serial)} /> : null}
    </>
  );
}

/** A refusal to compare, in the service's words; anything else is a fault. */
export async function comparedOrWhy<T>(compare: Promise<T>): Promise<T | string> {
  try {
    return await compare;
  } catch (error) {
    if (error instanceof AppError && error.code !== "server.fault") return error.message;
    throw error;
  }
}

async function Result({ ctx, from, to, serial }: { ctx: PersonCtx; from: string; to: string; serial?: string }) {
  if (from === to) return <Notice title="The same package twice">Choose two different ones.</Notice>;
  const sides = await comparedOrWhy(Promise.all([getPackageView(ctx, from), getPackageView(ctx, to)]));
  if (typeof sides === "string") return <Notice title="These can't be compared">{sides}</Notice>;
  const [older, newer] = sides;
  const unbuilt = sides.find((side) => side.digest === null);
  if (unbuilt) {
    return (
      <Notice title="These can't be compared">{`Package ${unbuilt.version} of ${unbuilt.lot} was not built.`}</Notice>
    );
  }
  const layout = (await getLayout(ctx, { family: newer.family, version: newer.layout }))
    .document as unknown as LayoutDocument;
  return (
    <>
      <Card>
        <div className="mb-4 grid gap-4 md:grid-cols-2">
          <Side name="Older" side={older} />
          <Side name="Newer" side={newer} />
        </div>
        <ComparisonSummary key={`${from}${to}`} from={from} to={to} layout={layout} />
        {older.family === newer.family && older.layout !== newer.layout ? (
          <p className="mt-3 text-sm">
            The layouts differ too:{" "}
            <Link href={`/compare?family=${newer.family}&fromLayout=${older.layout}&toLayout=${newer.layout}`}>
              {older.layout} → {newer.layout}
            </Link>
          </p>
        ) : null}
      </Card>
      <ComparisonView key={`${from}${to}`} from={from} to={to} layout={layout} serial={serial} />
    </>
  );
}

function Side({ name, side }: { name: string; side: PackageView }) {
  return (
    <div className="min-w-0">
      {side.digest ? (
        <SealMark
          digest={side.digest}
          above={
            <span className="inline-flex flex-wrap items-center gap-x-2.5">
              {name}:{" "}
              <Link href={`/packages/${side.id}`}>
                {side.version} of {side.lot}
              </Link>
              <StateMark {...stateOf("package", side.state)} />
            </span>
          }
          below={`layout ${side.layout} of ${side.family}`}
        />
      ) : null}
    </div>
  );
}
