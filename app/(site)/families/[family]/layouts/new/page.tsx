import type { Metadata } from "next";
import { Notice } from "@/app/_components/notice";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getLayout, listLayouts } from "@/lib/services/layouts/get-layout";
import { getEditorBasis } from "@/lib/services/layouts/lint-document";
import { LayoutEditor } from "../layout-editor";
import { continuedText, startingText } from "../starting-text";

export const metadata: Metadata = { title: "New layout" };

interface PageProps {
  params: Promise<{ family: string }>;
  searchParams: Promise<{ from?: string }>;
}

export default async function NewLayoutPage({ params, searchParams }: PageProps) {
  const ctx = await pageContext();
  const family = decodeURIComponent((await params).family).toUpperCase();
  const { from } = await searchParams;
  const basis = await orNotFound(getEditorBasis(ctx, family));
  const { items } = await listLayouts(ctx, { family, limit: 1_000 });
  const version = from ?? items[0]?.version;
  const before = version === undefined ? undefined : await orNotFound(getLayout(ctx, { family, version }));
  const taken = items.map((layout) => layout.version);
  const source = before ? continuedText(before.source, before.version, taken) : startingText(family);
  if (!holds(ctx, "engineer")) {
    return (
      <Notice tone="caution" title="Engineers write layouts">
        Your roles let you read layouts. Ask an engineer for a new one.
      </Notice>
    );
  }
  return <LayoutEditor family={family} basis={basis} source={source} mayWrite asked={false} />;
}
