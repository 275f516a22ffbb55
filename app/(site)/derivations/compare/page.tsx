import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { Notice } from "@/app/_components/notice";
import { TitleRow } from "@/app/_components/title-row";
import { AppError } from "@/lib/errors";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import type { PersonCtx } from "@/lib/services/context";
import { compareDerivations } from "@/lib/services/derivations/compare-derivations";
import { getDerivationView, listLotDerivations } from "@/lib/services/derivations/get-derivation";
import type { DerivationSummary } from "@/schemas/api/derivations";
import { Choice } from "./choice";
import { DeviceDifferences } from "./device-differences";
import { FactsOfBoth } from "./facts-of-both";

export const metadata: Metadata = { title: "Compare derivations" };

interface PageProps {
  searchParams: Promise<{ from?: string; to?: string }>;
}

const isFinished = ({ state }: DerivationSummary) => state !== "working" && state !== "failed";

export default async function CompareDerivationsPage({ searchParams }: PageProps) {
  const ctx = await pageContext();
  const asked = await searchParams;
  const known = asked.to ?? asked.from;
  if (!known) {
    return (
      <>
        <TitleRow title="Compare derivations" />
        <EmptyState title="No derivation chosen">
          Open a derivation of a <Link href="/lots">lot</Link> and compare it from there.
        </EmptyState>
      </>
    );
  }
  const { lot } = await orNotFound(getDerivationView(ctx, known));
  const derivations = (await listLotDerivations(ctx, lot, { limit: 1_000 })).items.filter(isFinished);
  const to = asked.to ?? derivations.find(({ id }) => id !== asked.from)?.id;
  const from = asked.from ?? chooseFrom(derivations, to);
  const compared = from && to ? await compareOrRefusal(ctx, from, to) : undefined;
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: lot, href: `/lots/${lot}` },
          { name: "Coefficients", href: `/lots/${lot}/coefficients` },
          { name: "Compare" },
        ]}
        title="Compare derivations"
        note="What other runs, options or exclusions change, and what it does at capacity"
        actions={
          from && to ? (
            <LinkButton href={`/derivations/compare?from=${to}&to=${from}`}>Swap the two</LinkButton>
          ) : undefined
        }
      />
      <div className="flex flex-col gap-[18px]">
        <Card title="Which two">
          <Choice derivations={derivations} from={from} to={to} />
        </Card>
        {compared instanceof AppError ? (
          <Notice tone="bad" title="These two can't be compared">
            {compared.message}
          </Notice>
        ) : compared && from && to ? (
          <>
            {compared.proven ? null : (
              <Notice tone="caution" title="Effects are not proven over this range">
                The two have no proven range in common; effects are stated over {compared.rangeC[0]} to{" "}
                {compared.rangeC[1]} °C all the same.
              </Notice>
            )}
            <FactsOfBoth comparison={compared} />
            <DeviceDifferences
              from={from}
              to={to}
              rangeC={compared.rangeC}
              counts={compared.counts}
              largestEffectV={compared.largestEffectV}
            />
          </>
        ) : (
          <EmptyState title="Nothing to compare with yet">
            This lot has one derivation only.{" "}
            <Link href={`/lots/${lot}/coefficients?like=${known}`}>Try other options</Link> for a second one.
          </EmptyState>
        )}
      </div>
    </>
  );
}

/** The comparison, or why there is none. */
async function compareOrRefusal(ctx: PersonCtx, from: string, to: string) {
  try {
    return await orNotFound(compareDerivations(ctx, { from, to, limit: 1 }));
  } catch (error) {
    if (error instanceof AppError) return error;
    throw error;
  }
}

/** The derivation before this one, else any other of the lot. */
function chooseFrom(derivations: readonly DerivationSummary[], to: string | undefined): string | undefined {
  const at = derivations.findIndex(({ id }) => id === to);
  return (derivations[at + 1] ?? derivations.find(({ id }) => id !== to))?.id;
}
