import type { ReactNode } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Select, type SelectOption } from "@/app/_components/form/select";
import { stateOf } from "@/app/_components/state/state-of";
import { formatDate } from "@/lib/domain/format/time";
import type { PersonCtx } from "@/lib/services/context";
import { getLot, listLots } from "@/lib/services/lots/get-lot";
import { getPackageView, listLotPackages } from "@/lib/services/packages/get-package";
import { type Chosen, packageIdOf } from "./chosen";

const OFFERED = 200;

/** The lots that the two sides come from: as named, else those of the packages named, else the newest with a package. */
export async function lotsOf(ctx: PersonCtx, chosen: Chosen): Promise<[string | undefined, string | undefined]> {
  const from = chosen.lot ?? (await lotOfPackage(ctx, chosen.from));
  const to = chosen.toLot ?? (await lotOfPackage(ctx, chosen.to)) ?? from;
  return [from ?? to, to];
}

/** Without packages of another lot than the one that is named beside them: the lot was changed in the form. */
export async function settledChoice(ctx: PersonCtx, chosen: Chosen): Promise<Chosen> {
  const fits = async (lot: string | undefined, id: string | undefined) =>
    lot === undefined || (await lotOfPackage(ctx, id)) === lot.toUpperCase();
  return {
    ...chosen,
    from: (await fits(chosen.lot, chosen.from)) ? chosen.from : undefined,
    to: (await fits(chosen.toLot, chosen.to)) ? chosen.to : undefined,
  };
}

async function lotOfPackage(ctx: PersonCtx, text: string | undefined): Promise<string | undefined> {
  const id = packageIdOf(text);
  if (id === undefined) return undefined;
  return getPackageView(ctx, id).then(
    (view) => view.lot,
    () => undefined,
  );
}

/** Built packages of a lot as a choice, newest first. */
export async function packagesOf(ctx: PersonCtx, lot: string | undefined): Promise<SelectOption[]> {
  if (lot === undefined) return [];
  const known = await getLot(ctx, lot).catch(() => undefined);
  if (!known) return [];
  const { items } = await listLotPackages(ctx, known.code, { limit: OFFERED });
  return items
    .filter((one) => one.digest !== null)
    .map((one) => ({
      value: one.id,
      name: `${one.version}, ${stateOf("package", one.state).word}, ${formatDate(one.createdAt)}`,
    }));
}

/** A form that names two packages by lot and version; it works by the address alone. */
export async function PackageChoice({
  ctx,
  chosen,
  kind,
  children,
}: {
  ctx: PersonCtx;
  chosen: Chosen;
  kind: "packages" | "images";
  children?: ReactNode;
}) {
  const [fromLot, toLot] = await lotsOf(ctx, chosen);
  const lots = (await listLots(ctx, { limit: 1_000 })).items.map(({ code }) => ({ value: code, name: code }));
  const from = await packagesOf(ctx, fromLot);
  const to = fromLot === toLot ? from : await packagesOf(ctx, toLot);
  const button = fromLot === undefined ? "Show its packages" : "Compare";
  return (
    <Card>
      <form action="/compare" className="flex flex-col gap-4">
        <input type="hidden" name="kind" value={kind} />
        <div className="grid items-start gap-4 md:grid-cols-2">
          <div className="grid gap-4 sm:grid-cols-2">
            <Select label="Lot" name="lot" defaultValue={fromLot} options={lots} placeholder="Choose a lot" required />
            {from.length > 0 ? (
              <Select label="Older package" name="from" defaultValue={chosen.from ?? from[1]?.value} options={from} />
            ) : null}
          </div>
          {fromLot === undefined ? null : (
            <div className="grid gap-4 sm:grid-cols-2">
              <Select label="Lot of the newer one" name="toLot" defaultValue={toLot} options={lots} />
              {to.length > 0 ? (
                <Select label="Newer package" name="to" defaultValue={chosen.to ?? to[0]?.value} options={to} />
              ) : null}
            </div>
          )}
        </div>
        {fromLot === undefined ? null : children}
        {fromLot !== undefined && from.length === 0 ? (
          <p className="text-sm text-ink-soft">No package of {fromLot} was built yet.</p>
        ) : null}
        <div>
          <Button type="submit" look="outline">
            {button}
          </Button>
        </div>
      </form>
    </Card>
  );
}
