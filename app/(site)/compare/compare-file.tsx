import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { Notice } from "@/app/_components/notice";
import { holds } from "@/lib/http/page-context";
import type { PersonCtx } from "@/lib/services/context";
import { listLots } from "@/lib/services/lots/get-lot";
import { type Chosen, packageIdOf, serialOf } from "./chosen";
import { FileDifference } from "./file-difference";
import { lotsOf, packagesOf } from "./package-choice";

/** A file against one image: which image stands in the address, the file stays with the reader. */
export async function CompareFile({ ctx, chosen }: { ctx: PersonCtx; chosen: Chosen }) {
  const [lot] = await lotsOf(ctx, chosen);
  const lots = (await listLots(ctx, { limit: 1_000 })).items.map(({ code }) => ({ value: code, name: code }));
  const packages = await packagesOf(ctx, lot);
  const from = packageIdOf(chosen.from);
  const serial = serialOf(chosen.serial);
  return (
    <>
      <Card>
        <form action="/compare" className="flex flex-col gap-4">
          <input type="hidden" name="kind" value="file" />
          <div className="grid items-start gap-4 md:grid-cols-3">
            <Select label="Lot" name="lot" defaultValue={lot} options={lots} placeholder="Choose a lot" required />
            {packages.length > 0 ? (
              <>
                <Select label="Package" name="from" defaultValue={from ?? packages[0]?.value} options={packages} />
                <TextInput label="Serial" name="serial" code defaultValue={serial} autoComplete="off" />
              </>
            ) : null}
          </div>
          {lot !== undefined && packages.length === 0 ? (
            <p className="text-sm text-ink-soft">No package of {lot} was built yet.</p>
          ) : null}
          <div>
            <Button type="submit" look="outline">
              {lot === undefined ? "Show its packages" : "Choose this image"}
            </Button>
          </div>
        </form>
      </Card>
      {from && serial ? <Against ctx={ctx} packageId={from} serial={serial} /> : null}
    </>
  );
}

function Against({ ctx, packageId, serial }: { ctx: PersonCtx; packageId: string; serial: string }) {
  if (holds(ctx, "engineer", "reviewer", "service"))
    return <FileDifference key={`${packageId}${serial}`} packageId={packageId} serial={serial} />;
  return (
    <Notice title="Not yours to do">Engineers, reviewers and service hold files from devices against images.</Notice>
  );
}
