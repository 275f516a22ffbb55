import type { Metadata } from "next";
import { Notice } from "@/app/_components/notice";
import { TitleRow } from "@/app/_components/title-row";
import { holds, pageContext } from "@/lib/http/page-context";
import { FamilyForm } from "../family-form";

export const metadata: Metadata = { title: "Add a family" };

/** What R 60 or common practice suggests; everything else is the maker's own to know. */
const suggested = {
  accuracyClass: "C",
  intervals: 3_000,
  referenceC: 20,
  pLc: 0.7,
  coverage: 0.95,
  confidence: 0.95,
} as const;

export default async function NewFamilyPage() {
  const ctx = await pageContext();
  return (
    <>
      <TitleRow breadcrumb={[{ name: "Families", href: "/families" }, { name: "New" }]} title="Add a family" />
      {holds(ctx, "engineer") ? (
        <FamilyForm initial={suggested} />
      ) : (
        <Notice tone="caution" title="Engineers add families">
          Your roles let you read families. Ask an engineer to add one.
        </Notice>
      )}
    </>
  );
}
