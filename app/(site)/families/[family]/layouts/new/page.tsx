import type { Metadata } from "next";
import { Notice } from "@/app/_components/notice";
import { setOut } from "@/lib/domain/json-set-out";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getLayout, listLayouts } from "@/lib/services/layouts/get-layout";
import { getEditorBasis } from "@/lib/services/layouts/lint-document";
import { listLots } from "@/lib/services/lots/get-lot";
import { LayoutEditor } from "../layout-editor";
import { continuedText, templates, templateText } from "../templates";

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
  if (!holds(ctx, "engineer")) {
    return (
      <Notice tone="caution" title="Engineers write layouts">
        Your roles let you read layouts. Ask an engineer for a new one.
      </Notice>
    );
  }
  const { items } = await listLayouts(ctx, { family, limit: 1_000 });
  const lots = await listLots(ctx, { family, limit: 200 });
  const version = from ?? items[0]?.version;
  const before = version === undefined ? undefined : await orNotFound(getLayout(ctx, { family, version }));
  const taken = items.map((layout) => layout.version);
  const [first] = templates;
  const begun = first ? templateText(first, family) : "";
  return (
    <LayoutEditor
      family={family}
      basis={basis}
      source={before ? continuedText(setOut(before.source), before.version, taken) : begun}
      others={items.map(({ version, state }) => ({ version, state }))}
      lots={lots.items.map((lot) => lot.code)}
      mayWrite
      asked={false}
    />
  );
}
