import { listLots } from "@/db/queries/lots";
import type { Ctx } from "@/lib/services/context";
import { getLotThread, type LotThread } from "@/lib/services/lots/get-lot-thread";
import type { TodayItem } from "@/schemas/api/today";

const STITCHES = [
  ["serials", "Serials", ""],
  ["readings", "Readings", "/readings"],
  ["coefficients", "Coefficients", "/coefficients"],
  ["package", "Package", "/packages"],
  ["review", "Review", "/packages"],
  ["written", "Written", "/writes"],
] as const;

/** Newest lots, each with the first stitch of its thread that is not done. */
export async function listLotSteps(ctx: Ctx, limit: number): Promise<TodayItem[]> {
  const lots = await listLots(ctx.db, { limit });
  const items: TodayItem[] = [];
  for (const lot of lots) {
    const step = nextStep(await getLotThread(ctx, lot.id));
    items.push({
      kind: "lot",
      title: lot.code,
      detail: `${lot.familyCode} · ${step.text}`,
      who: lot.createdByName,
      at: lot.createdAt.toISOString(),
      tone: step.tone,
      link: `/lots/${encodeURIComponent(lot.code)}${step.path}`,
      digest: null,
    });
  }
  return items;
}

function nextStep(thread: LotThread): { text: string; tone: TodayItem["tone"]; path: string } {
  const due = STITCHES.find(([name]) => thread[name].tone !== "good");
  if (!due) return { text: "all written and verified", tone: "good", path: "" };
  const [name, label, path] = due;
  const { tone, count, blocked } = thread[name];
  const known = count === "—" ? "not begun" : count;
  return { text: `${label}: ${known}${blocked ? `, ${blocked}` : ""}`, tone: tone === "idle" ? "wait" : tone, path };
}
