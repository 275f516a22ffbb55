import type { Metadata } from "next";
import { Notice } from "@/app/_components/notice";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getFamily } from "@/lib/services/families/get-family";
import { FamilyForm } from "../../family-form";

export const metadata: Metadata = { title: "New revision" };

export default async function ReviseFamilyPage({ params }: { params: Promise<{ family: string }> }) {
  const ctx = await pageContext();
  const { family: code } = await params;
  const family = await orNotFound(getFamily(ctx, decodeURIComponent(code)));
  const [newest] = family.revisions;
  const href = `/families/${family.code}`;
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Families", href: "/families" }, { name: family.code, href }, { name: "New revision" }]}
        title={`Revision ${family.newestRevision + 1} of ${family.code}`}
        note={`Begins with the values of revision ${family.newestRevision}; lots made before keep theirs`}
      />
      {holds(ctx, "engineer") ? (
        <FamilyForm initial={newest?.document} revise={family.code} />
      ) : (
        <Notice tone="caution" title="Engineers write revisions">
          Your roles let you read families. Ask an engineer for a new revision.
        </Notice>
      )}
    </>
  );
}
