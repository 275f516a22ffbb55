/** What every lot of the demo stands on: families, layouts and equipment. */

import { DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import { addEquipment } from "@/lib/services/equipment/keep-equipment";
import { addFamily } from "@/lib/services/families/add-family";
import { decideFamilyRevision, submitFamilyRevision } from "@/lib/services/families/decide-family-revision";
import { decideLayout, submitLayout } from "@/lib/services/layouts/decide-layout";
import { addLayout } from "@/lib/services/layouts/write-layout";
import type { FamilyDocument } from "@/schemas/api/families";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { benchFamily, floorFamily } from "./families";
import { benchLayouts, floorLayout } from "./layouts";
import type { Story } from "./story";

const approve = { decision: "approve", password: DEMO_PASSWORD } as const;

/** Equipment of a family's runs. One sensor's certificate has run out, which runs with it are told. */
export const EQUIPMENT_OF: Readonly<Record<string, readonly string[]>> = {
  "MW-20": ["CH-2", "PT-07", "LD-20", "RD-1"],
  "MW-300": ["CH-2", "PT-08", "LD-300", "RD-1"],
};

async function publishFamily(story: Story, document: FamilyDocument): Promise<void> {
  const key = { family: document.code, number: 1 };
  await addFamily(story.as("engineer"), document);
  await submitFamilyRevision(story.as("engineer"), key);
  await decideFamilyRevision(story.as("reviewer"), { ...key, ...approve });
}

async function draftLayout(story: Story, document: LayoutDocument) {
  const source = `${JSON.stringify(document, null, 2)}\n`;
  return addLayout(story.as("engineer"), { family: document.family, source, document });
}

/** Publishes a layout: written by the first engineer, looked at by the first reviewer. */
export async function publishLayout(story: Story, document: LayoutDocument): Promise<void> {
  const key = await draftLayout(story, document);
  await submitLayout(story.as("engineer"), key);
  await decideLayout(story.as("reviewer"), { ...key, ...approve });
}

/** A layout that waits for a second person. */
export async function askForLayout(story: Story, document: LayoutDocument): Promise<void> {
  await submitLayout(story.as("engineer"), await draftLayout(story, document));
}

function dateAfter(today: Date, days: number): string {
  return new Date(today.getTime() + days * 86_400_000).toISOString().slice(0, 10);
}

/** Four shelves' ends of the chamber: warmer at the top, as its certificate of uniformity has it. */
const CHAMBER_POSITIONS = [
  { position: "A1", deviationK: 0.12, uncertaintyK: 0.1 },
  { position: "A2", deviationK: 0.08, uncertaintyK: 0.1 },
  { position: "B1", deviationK: -0.05, uncertaintyK: 0.1 },
  { position: "B2", deviationK: -0.11, uncertaintyK: 0.1 },
];

async function addAllEquipment(story: Story): Promise<void> {
  const due = (days: number) => dateAfter(story.today, days);
  const engineer = story.as("engineer");
  const pieces = [
    { code: "CH-2", kind: "chamber", certificate: "K-2231", calibratedUntil: due(210), uncertainty: 0.3 },
    { code: "PT-07", kind: "sensor", certificate: "T-0874", calibratedUntil: due(95), uncertainty: 0.02 },
    { code: "PT-08", kind: "sensor", certificate: "T-0875", calibratedUntil: due(-12), uncertainty: 0.02 },
    { code: "LD-20", kind: "load", certificate: "M-1140", calibratedUntil: due(320), uncertainty: 0.00006 },
    { code: "LD-300", kind: "load", certificate: "M-1155", calibratedUntil: due(18), uncertainty: 0.001 },
    { code: "RD-1", kind: "reader", certificate: "E-4410", calibratedUntil: due(140), uncertainty: 0.000004 },
  ] as const;
  for (const piece of pieces) {
    const positions = piece.kind === "chamber" ? CHAMBER_POSITIONS : [];
    await addEquipment(engineer, { ...piece, coverageFactor: 2, positions });
  }
}

/** Two families with published layouts, and the equipment. */
export async function layGround(story: Story): Promise<void> {
  await addAllEquipment(story);
  await publishFamily(story, benchFamily.document);
  await publishFamily(story, floorFamily.document);
  await publishLayout(story, benchLayouts.first);
  await publishLayout(story, floorLayout);
}
