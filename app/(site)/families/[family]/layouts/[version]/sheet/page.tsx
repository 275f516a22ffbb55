import type { Metadata } from "next";
import { Digest } from "@/app/_components/digest";
import { MemoryMap } from "@/app/_components/memory-map";
import { memoryOfLayout } from "@/app/_components/memory-map-parts";
import { PrintButton } from "@/app/_components/print-button";
import { stateOf } from "@/app/_components/state/state-of";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import { getLayout } from "@/lib/services/layouts/get-layout";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { ChecksumSheet, FieldSheet, MemoryFacts } from "./sheet-tables";

interface PageProps {
  params: Promise<{ family: string; version: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  const { family, version } = await params;
  return { title: `Memory map of ${decodeURIComponent(family).toUpperCase()}, layout ${decodeURIComponent(version)}` };
}

/** The layout on paper, for those who write the firmware: memory map, fields, checksums with their parameters. */
export default async function LayoutSheetPage({ params }: PageProps) {
  const ctx = await pageContext();
  const { family, version } = await params;
  const key = { family: decodeURIComponent(family), version: decodeURIComponent(version) };
  const layout = await orNotFound(getLayout(ctx, key));
  const document = layout.document as unknown as LayoutDocument;
  const memory = memoryOfLayout(document);
  const address = `/families/${layout.family}/layouts/${layout.version}`;
  return (
    <div className="mx-auto max-w-[1100px] print:max-w-none">
      <TitleRow
        breadcrumb={[
          { name: "Families", href: "/families" },
          { name: layout.family, href: `/families/${layout.family}` },
          { name: layout.version, href: address },
          { name: "Memory-map sheet" },
        ]}
        title={`Memory map of ${layout.family}, layout ${layout.version}`}
        state={stateOf("layout", layout.state)}
        note={
          layout.publishedAt ? (
            <>
              published <TimeText at={layout.publishedAt} />
            </>
          ) : (
            `draft ${layout.draft}; it may change before it is published`
          )
        }
        actions={<PrintButton>Print</PrintButton>}
      />
      <div className="flex flex-col gap-6">
        <MemoryFacts document={document} used={memory.used} />
        <section className="break-inside-auto">
          <h2 className="mb-2 text-md">Memory</h2>
          <MemoryMap bytes={memory.bytes} pageBytes={memory.pageBytes} parts={memory.parts} label="Memory map" />
        </section>
        <FieldSheet document={document} />
        <ChecksumSheet document={document} />
        <footer className="text-sm">
          <p>
            Stored integer = round((value − bias) / scale), halves to even; value = stored · scale + bias. Text is
            padded with NUL. Bytes that nothing covers hold the fill.
          </p>
          <Digest value={layout.sha256} name="layout digest" />
        </footer>
      </div>
    </div>
  );
}
