import type { Metadata } from "next";
import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { Facts } from "@/app/_components/facts";
import { HexGrid } from "@/app/_components/hex-grid";
import { MemoryMap } from "@/app/_components/memory-map";
import { memoryOfLayout } from "@/app/_components/memory-map-parts";
import { StateMark } from "@/app/_components/state/state-mark";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { listSegments } from "@/builders/codec/segments";
import { formatAddress } from "@/lib/domain/format/digest";
import { formatDecoded } from "@/lib/domain/format/field-value";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { orNotFound, pageContext } from "@/lib/http/page-context";
import { getLayout } from "@/lib/services/layouts/get-layout";
import { getImageView } from "@/lib/services/packages/read-images";
import type { ImageView } from "@/schemas/api/images";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { ImageDownloads } from "./image-downloads";

interface PageProps {
  params: Promise<{ package: string; serial: string }>;
}

export async function generateMetadata({ params }: PageProps): Promise<Metadata> {
  return { title: `Image of ${decodeURIComponent((await params).serial).toUpperCase()}` };
}

export default async function ImagePage({ params }: PageProps) {
  const ctx = await pageContext();
  const { package: id, serial } = await params;
  const image = await orNotFound(getImageView(ctx, id, decodeURIComponent(serial).toUpperCase()));
  const layout = await getLayout(ctx, { family: image.family, version: image.layout });
  const document = layout.document as unknown as LayoutDocument;
  const memory = memoryOfLayout(document);
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: image.lot, href: `/lots/${image.lot}` },
          { name: "Packages", href: `/lots/${image.lot}/packages` },
          { name: image.version, href: `/packages/${id}` },
          { name: image.serial },
        ]}
        title={image.serial}
        code
        note={`its image in package ${image.version}, by layout ${image.layout}`}
        actions={
          <ImageDownloads
            endpoint={`/api/v1/packages/${id}/images/${encodeURIComponent(image.serial)}`}
            fileName={`${image.serial}-${image.version}`}
          />
        }
      />
      <div className="flex flex-col gap-[18px]">
        <ImageFacts image={image} document={document} />
        <div className="grid gap-[18px] xl:grid-cols-2">
          <Card
            title="Memory"
            note={`${formatNumberOf(memory.bytes, "byte")} in pages of ${memory.pageBytes}, ${memory.used} in use`}
          >
            <MemoryMap
              bytes={memory.bytes}
              pageBytes={memory.pageBytes}
              parts={memory.parts}
              hex={image.bytes}
              label={`Memory of ${image.serial}`}
            />
          </Card>
          <Card title="Bytes" note="Point at a byte to see its field, or at a field to see its bytes">
            <HexGrid
              hex={image.bytes}
              fields={image.fields}
              fill={image.fill}
              kept={image.kept}
              label={`Bytes of ${image.serial}`}
            />
          </Card>
        </div>
        <FieldsCard image={image} />
      </div>
    </>
  );
}

function ImageFacts({ image, document }: { image: ImageView; document: LayoutDocument }) {
  const wrong = image.checksums.filter((one) => !one.ok);
  return (
    <Card>
      <div className="flex flex-wrap items-start justify-between gap-x-8 gap-y-3">
        <Facts
          small
          facts={[
            { label: "board", value: image.hardwareId ?? "not known" },
            placeFact(document),
            { label: "bytes", value: image.length },
          ]}
        />
        <div className="min-w-0 text-sm">
          <p className="text-xs text-ink-soft">SHA-256 of the image</p>
          <Digest value={image.sha256} name="digest of the image" />
        </div>
        <ul className="text-sm">
          <li>
            {wrong.length === 0 ? (
              <StateMark tone="good" word={formatNumberOf(image.checksums.length, "checksum fits", "checksums fit")} />
            ) : (
              <StateMark tone="bad" word={`${wrong.map((one) => one.name).join(", ")} wrong`} />
            )}
          </li>
          <li>
            <Link href={`/derivations/${image.derivation}/${encodeURIComponent(image.serial)}`}>
              Where its coefficients come from
            </Link>
          </li>
          <li>
            <Link href={`/trace/${encodeURIComponent(image.serial)}`}>Trace of this serial</Link>
          </li>
        </ul>
      </div>
    </Card>
  );
}

/** Where the image lies in the device, hex; offsets on this page count through all segments. */
function placeFact({ memory }: LayoutDocument) {
  const segments = listSegments(memory);
  if (segments.length === 1) return { label: "first address, hex", value: formatAddress(memory.baseAddress) };
  const places = segments.map(({ at, end, address }) => {
    return `${formatAddress(at)} on at ${formatAddress(address)}–${formatAddress(address + end - at - 1)}`;
  });
  return { label: "offsets at addresses, hex", value: places.join(", ") };
}

function FieldsCard({ image }: { image: ImageView }) {
  const checksums = new Set(image.checksums.map(({ name }) => name));
  const rows = image.fields.map((field) => {
    const { text, unit } = formatDecoded(field);
    const source = checksums.has(field.name) ? "checksum" : (field.source ?? "constant");
    // In one cell, so that a phone shows both without scrolling.
    const value = unit === "" ? text : `${text} ${unit}`;
    return { name: field.name, value, raw: field.raw.toUpperCase(), address: formatAddress(field.at), source };
  });
  return (
    <Card title="Fields" note="As decoded from these bytes">
      <DataTable
        name={`fields of ${image.serial}`}
        rows={rows}
        columns={[
          { key: "name", header: "Field", format: { as: "code" } },
          { key: "value", header: "Value", align: "right", format: { as: "code" } },
          { key: "raw", header: "Stored", unit: "hex", format: { as: "code" } },
          { key: "address", header: "At", unit: "hex", format: { as: "code" } },
          { key: "source", header: "From" },
        ]}
        empty={{ title: "No fields" }}
      />
    </Card>
  );
}
