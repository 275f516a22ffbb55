import type { PersonCtx } from "@/lib/services/context";
import { addFamily } from "@/lib/services/families/add-family";
import { decideFamilyRevision, submitFamilyRevision } from "@/lib/services/families/decide-family-revision";
import { decideLayout, submitLayout } from "@/lib/services/layouts/decide-layout";
import { addLayout } from "@/lib/services/layouts/write-layout";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import type { FamilyDocument } from "@/schemas/api/families";
import { firstGolden, type GoldenLot, secondGolden } from "./golden";

/** Who writes and who decides; the password is the reviewer's. */
export interface ScenarioPeople {
  engineer: PersonCtx;
  reviewer: PersonCtx;
  password: string;
}

/** A family whose revision 1 a second person published. */
export async function publishFamily(
  { engineer, reviewer, password }: ScenarioPeople,
  document: FamilyDocument,
): Promise<void> {
  const key = { family: document.code, number: 1 };
  await addFamily(engineer, document);
  await submitFamilyRevision(engineer, key);
  await decideFamilyRevision(reviewer, { ...key, decision: "approve", password });
}

/** A layout that a second person published. @param source the document as text. */
export async function publishLayout({ engineer, reviewer, password }: ScenarioPeople, source: string): Promise<void> {
  const document = JSON.parse(source);
  const key = await addLayout(engineer, { family: document.family, source, document });
  await submitLayout(engineer, key);
  await decideLayout(reviewer, { ...key, decision: "approve", password });
}

async function arrange(people: ScenarioPeople, golden: GoldenLot): Promise<GoldenLot> {
  await publishFamily(people, golden.family);
  await publishLayout(people, golden.layout);
  const { lot, firmware, serials } = golden;
  await addLot(people.engineer, { code: lot, family: golden.family.code, firmware });
  await addDevices(people.engineer, { lot, serials });
  return golden;
}

/** Family MW-20 and layout 1.0.0, both published, and lot MW20-2609 with its 28 serials. */
export const arrangeFamilyLot = (people: ScenarioPeople): Promise<GoldenLot> => arrange(people, firstGolden());

/** Family MW-300 and layout 2.1.3, both published, and lot MW300-2610 with its 15 serials. */
export const arrangeSecondFamilyLot = (people: ScenarioPeople): Promise<GoldenLot> => arrange(people, secondGolden());
