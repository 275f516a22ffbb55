import type { Metadata } from "next";
import { TitleRow } from "@/app/_components/title-row";
import { holds, pageContext } from "@/lib/http/page-context";
import { listEquipment } from "@/lib/services/equipment/keep-equipment";
import { EquipmentList } from "./equipment-list";

export const metadata: Metadata = { title: "Equipment" };

export default async function EquipmentPage() {
  const ctx = await pageContext();
  const { items } = await listEquipment(ctx, { limit: 1_000 });
  const today = ctx.now().toISOString().slice(0, 10);
  return (
    <>
      <TitleRow
        title="Equipment"
        note="Sensors, chambers, loads and readers with their certificates; runs keep the values of their day"
      />
      <EquipmentList items={items} today={today} mayWrite={holds(ctx, "engineer")} />
    </>
  );
}
