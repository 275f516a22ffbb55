import type { Metadata } from "next";
import { ROLES } from "@/lib/domain/roles";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import { askBench, getBenchLot, listBenchLots } from "@/lib/services/stations/get-bench";
import { ChooseLot } from "./choose-lot";
import { ScanTask } from "./scan-task";

export const metadata: Metadata = { title: "Bench" };

interface PageProps {
  searchParams: Promise<{ lot?: string; package?: string; serial?: string }>;
}

/** Bench: choose what is written, then scan device after device. The choice and the last scan stand in the address. */
export default async function BenchPage({ searchParams }: PageProps) {
  const ctx = await pageContext(ROLES);
  const { lot: code, package: chosen, serial: scanned } = await searchParams;
  if (!code)
    return (
      <ChooseLot
        lots={await listBenchLots(ctx)}
        person={ctx.actor.name}
        onlyOperator={isOnlyOperator(ctx.actor.roles)}
      />
    );
  const lot = await orNotFound(getBenchLot(ctx, code));
  const serial = scanned?.trim().toUpperCase();
  const packageId = chosen ?? lot.live?.package ?? "";
  const answer = serial ? await askBench(ctx, { lot, chosen: packageId, serial }) : null;
  return <ScanTask lot={lot} chosen={packageId} answer={answer} at={ctx.now().toISOString()} />;
}

const isOnlyOperator = (roles: readonly string[]) => roles.every((role) => role === "operator");
