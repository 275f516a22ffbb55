import Link from "next/link";
import { Card } from "@/app/_components/card";
import { DiffValue } from "@/app/_components/diff-value";
import { TextInput } from "@/app/_components/form/text-input";
import { HexGrid } from "@/app/_components/hex-grid";
import { Notice } from "@/app/_components/notice";
import { StateMark } from "@/app/_components/state/state-mark";
import { formatFieldChange } from "@/lib/domain/format/field-value";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { compareDeviceImages } from "@/lib/services/compare/compare-device-images";
import type { PersonCtx } from "@/lib/services/context";
import type { ImageView } from "@/schemas/api/images";
import { changeWords } from "./change-words";
import { type Chosen, packageIdOf, serialOf } from "./chosen";
import { comparedOrWhy } from "./compare-packages";
import { PackageChoice } from "./package-choice";

/** Two images with their bytes side by side. */
export async function CompareImages({ ctx, chosen }: { ctx: PersonCtx; chosen: Chosen }) {
  const from = packageIdOf(chosen.from);
  const to = packageIdOf(chosen.to);
  const serial = serialOf(chosen.serial);
  const toSerial = serialOf(chosen.toSerial);
  return (
    <>
      <PackageChoice ctx={ctx} chosen={chosen} kind="images">
        <div className="grid items-start gap-4 md:grid-cols-2">
          <TextInput label="Serial" name="serial" code defaultValue={serial} autoComplete="off" />
          <TextInput
            label="Serial in the newer one"
            name="toSerial"
            code
            defaultValue={toSerial}
            autoComplete="off"
            help="Empty for the same serial."
          />
        </div>
      </PackageChoice>
      {from && to && serial ? <Result ctx={ctx} input={{ from, to, serial, toSerial }} /> : null}
    </>
  );
}

async function Result({
  ctx,
  input,
}: {
  ctx: PersonCtx;
  input: { from: string; to: string; serial: string; toSerial?: string };
}) {
  const found = await comparedOrWhy(compareDeviceImages(ctx, input));
  if (typeof found === "string") return <Notice title="These can't be compared">{found}</Notice>;
  const changed = found.bytes.map(({ at }) => at);
  return (
    <>
      <Card
        title="What differs"
        aside={<StateMark {...changeWords[found.change]} />}
        note={formatNumberOf(changed.length, "byte")}
      >
        {found.fields.length === 0 ? <p className="text-sm text-ink-soft">No field differs.</p> : null}
        <ul className="flex flex-col gap-1">
          {found.fields.map((field) => (
            <li key={field.name} className="grid gap-x-4 text-sm sm:grid-cols-[12rem_1fr]">
              <span className="font-mono">{field.name}</span>
              <span className="min-w-0 overflow-x-auto">
                <DiffValue {...formatFieldChange(field)} />
              </span>
            </li>
          ))}
        </ul>
      </Card>
      <div className="grid gap-[18px] xl:grid-cols-2">
        <Image name="Older" image={found.from} changed={changed} />
        <Image name="Newer" image={found.to} changed={changed} />
      </div>
    </>
  );
}

function Image({ name, image, changed }: { name: string; image: ImageView; changed: readonly number[] }) {
  return (
    <Card
      title={
        <>
          {name}:{" "}
          <Link href={`/packages/${image.package}/images/${encodeURIComponent(image.serial)}`} className="font-mono">
            {image.serial}
          </Link>
        </>
      }
      note={`in package ${image.version} of ${image.lot}`}
    >
      <HexGrid
        hex={image.bytes}
        fields={image.fields}
        fill={image.fill}
        kept={image.kept}
        changed={changed}
        label={`Bytes of ${image.serial} in ${image.version}`}
      />
    </Card>
  );
}
