import type { Metadata } from "next";
import { TabLinks } from "@/app/_components/tab-links";
import { TitleRow } from "@/app/_components/title-row";
import { pageContext } from "@/lib/http/page-context";
import { type Chosen, kindOf } from "./chosen";
import { CompareFile } from "./compare-file";
import { CompareImages } from "./compare-images";
import { CompareLayouts } from "./compare-layouts";
import { ComparePackages } from "./compare-packages";
import { settledChoice } from "./package-choice";

export const metadata: Metadata = { title: "Compare" };

const notes = {
  packages: "Two packages, serial by serial: values old → new, and the bytes",
  images: "Two images side by side, of one serial in two packages or of two serials",
  file: "A file against one image of a package: HEX, S-records or raw bytes",
  layouts: "Two layouts of a family, and the version step that their differences ask for",
} as const;

export default async function ComparePage({ searchParams }: { searchParams: Promise<Chosen> }) {
  const ctx = await pageContext();
  const asked = await searchParams;
  const kind = kindOf(asked);
  const chosen = kind === "layouts" ? asked : await settledChoice(ctx, asked);
  return (
    <>
      <TitleRow title="Compare" note={notes[kind]} />
      <TabLinks
        label="What to compare"
        current={`/compare?kind=${kind}`}
        links={[
          { href: "/compare?kind=packages", name: "Packages" },
          { href: "/compare?kind=images", name: "Images" },
          { href: "/compare?kind=file", name: "A file" },
          { href: "/compare?kind=layouts", name: "Layouts" },
        ]}
      />
      <div className="flex flex-col gap-[18px]">
        {kind === "packages" ? <ComparePackages ctx={ctx} chosen={chosen} /> : null}
        {kind === "images" ? <CompareImages ctx={ctx} chosen={chosen} /> : null}
        {kind === "file" ? <CompareFile ctx={ctx} chosen={chosen} /> : null}
        {kind === "layouts" ? <CompareLayouts ctx={ctx} chosen={chosen} /> : null}
      </div>
    </>
  );
}
