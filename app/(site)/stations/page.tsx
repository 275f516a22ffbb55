import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { TitleRow } from "@/app/_components/title-row";
import { holds, pageContext } from "@/lib/http/page-context";
import { listFamilies } from "@/lib/services/families/get-family";
import { listStations } from "@/lib/services/stations/manage-stations";
import { StationList } from "./station-list";

export const metadata: Metadata = { title: "Stations" };

/** Programming stations: what they may write, when they were heard of last, their keys. */
export default async function StationsPage() {
  const ctx = await pageContext();
  const admin = holds(ctx, "admin");
  const { items } = await listStations(ctx, { limit: 1_000 });
  const families = admin ? (await listFamilies(ctx, { limit: 1_000 })).items.map((family) => family.code) : [];
  return (
    <>
      <TitleRow
        title="Stations"
        note="Each pulls what is live with its own key, writes, reads back and reports"
        actions={<LinkButton href="/stations/bench">Open the bench</LinkButton>}
      />
      <StationList stations={items} families={families} admin={admin} />
    </>
  );
}
