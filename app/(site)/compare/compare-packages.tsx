import Link from "next/link";
import { Card } from "@/app/_components/card";
import { changedParameters, comparedFields } from "@/app/_components/difference/compared-fields";
import { ComparisonFacts } from "@/app/_components/difference/comparison-facts";
import { ComparisonView } from "@/app/_components/difference/comparison-view";
import { Notice } from "@/app/_components/notice";
import { SealMark } from "@/app/_components/seal-mark";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import { getLayout } from "@/lib/services/layouts/get-layout";
import { comparePackages } from "@/lib/services/compare/compare-packages";
import type { Comparison } from "@/schemas/api/compare";
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
  const found = await comparedOrWhy(comparePackages(ctx, { from, to, limit: 1 }));
  if (typeof found === "string") return <Notice title="These can't be compared">{found}</Notice>;
  const layout = await getLayout(ctx, { family: found.to.family, version: found.to.layout });
  const document = layout.document as unknown as LayoutDocument;
  const { fields, counts } = found;
  return (
    <>
      <Card>
        <div className="mb-4 grid gap-4 md:grid-cols-2">
          <Side name="Older" side={found.from} />
          <Side name="Newer" side={found.to} />
        </div>
        <ComparisonFacts counts={counts} fields={changedParameters(fields, document)} />
        {found.from.family === found.to.family && found.from.layout !== found.to.layout ? (
          <p className="mt-3 text-sm">
            The layouts differ too:{" "}
            <Link
              href={`/compare?family=${found.to.family}&fromLayout=${found.from.layout}&toLayout=${found.to.layout}`}
            >
              {found.from.layout} → {found.to.layout}
            </Link>
          </p>
        ) : null}
      </Card>
      <ComparisonView
        key={`${from}${to}`}
        from={from}
        to={to}
        fields={comparedFields(fields, document)}
        serial={serial}
      />
    </>
  );
}

function Side({ name, side }: { name: string; side: Comparison["from"] }) {
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
