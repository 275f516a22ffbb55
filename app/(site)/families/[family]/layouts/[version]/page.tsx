import type { Metadata } from "next";
import { setOut } from "@/lib/domain/json-set-out";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { isMaker } from "@/lib/services/families/publishing";
import { getLayout, listLayouts } from "@/lib/services/layouts/get-layout";
import { getLayoutUse } from "@/lib/services/layouts/get-layout-use";
import { getEditorBasis } from "@/lib/services/layouts/lint-document";
import { listLots } from "@/lib/services/lots/get-lot";
import { LayoutDecision } from "../layout-decision";
import { LayoutEditor } from "../layout-editor";

interface PageProps {
  params: Promise<{ family: string; version: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  const { family, version } = await params;
  return { title: `Layout ${decodeURIComponent(version)} of ${decodeURIComponent(family).toUpperCase()}` };
}

export default async function LayoutPage({ params }: PageProps) {
  const ctx = await pageContext();
  const { family: code, version } = await params;
  const key = { family: decodeURIComponent(code), version: decodeURIComponent(version) };
  const layout = await orNotFound(getLayout(ctx, key));
  const basis = await getEditorBasis(ctx, layout.family);
  // A published layout is not judged against itself.
  const others = basis.publishedVersions.filter((one) => one.version !== layout.version);
  const judgedAgainst = { ...basis, publishedVersions: others };
  const versions = (await listLayouts(ctx, { family: layout.family, limit: 1_000 })).items;
  const lots = await listLots(ctx, { family: layout.family, limit: 200 });
  const uses = await getLayoutUse(ctx, { ...key, limit: 1_000 });
  const decides = layout.state === "in-review" && holds(ctx, "reviewer") && !(await isMaker(ctx, "layout", layout.id));
  return (
    <LayoutEditor
      key={`${layout.id}-${layout.state}`}
      family={layout.family}
      basis={judgedAgainst}
      layout={layout}
      source={setOut(layout.source)}
      others={versions
        .filter((one) => one.version !== layout.version)
        .map(({ version, state }) => ({ version, state }))}
      lots={lots.items.map((lot) => lot.code)}
      uses={uses.items}
      mayWrite={holds(ctx, "engineer")}
      asked={layout.submittedBy === ctx.actor.name}
      above={
        decides ? (
          <LayoutDecision
            family={layout.family}
            layout={layout}
            basis={judgedAgainst}
            oneTimeCode={await hasOneTimeCode(ctx)}
          />
        ) : undefined
      }
    />
  );
}
