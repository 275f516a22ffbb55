import { getLot } from "@/db/queries/lots";
import { listPooledDeviations } from "@/db/queries/pooled-deviations";
import { poolingLimit } from "@/lib/domain/compensation/envelope";
import { poolDeviations } from "@/lib/domain/compensation/pooled-deviation";
import { planSample } from "@/lib/domain/compensation/sample-plan";
import { devicesToShow, shareShown } from "@/lib/domain/compensation/share-shown";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { SamplePlanView } from "@/schemas/api/sample-plan";

/** Lots looked back at. */
const EARLIER_MAX = 10;
/** Share that verification devices are asked to show where nobody says otherwise; common practice, no source. */
const VERIFICATION_SHARE = 0.9;

export interface SamplePlanInput {
  lot: string;
  /** 1/K */
  expectedSd?: number;
  coverage?: number;
  confidence?: number;
  verificationShare?: number;
}

/**
 * How many sample and verification devices a lot takes, from what is expected or known of the scatter of gainTc.
 * @throws AppError `lot.not_found`
 */
export async function getSamplePlan(ctx: Ctx, input: SamplePlanInput): Promise<SamplePlanView> {
  const lot = await getLot(ctx.db, input.lot);
  const { rules } = await getLotRules(ctx.db, lot);
  const rows = await listPooledDeviations(ctx.db, lot.familyId, { exceptLotId: lot.id, limit: EARLIER_MAX });
  const pooled = poolDeviations(rows);
  const limit = poolingLimit(rules);
  const coverage = input.coverage ?? rules.coverage;
  const confidence = input.confidence ?? rules.confidence;
  const expectedSd = input.expectedSd ?? pooled?.sd ?? null;
  const share = input.verificationShare ?? VERIFICATION_SHARE;
  return {
    lot: lot.code,
    limit,
    coverage,
    confidence,
    expectedSd,
    earlier: pooled && {
      ...pooled,
      lots: rows.map(({ lot: code, derivationId, sd, n }) => ({ lot: code, derivation: derivationId, sd, n })),
    },
    sample: expectedSd === null ? null : planSample({ sd: expectedSd, limit, coverage, confidence }),
    verification: { share, n: devicesToShow(share, confidence), shownByFive: shareShown(5, confidence) },
  };
}
