"use client";

import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import { dueState, EQUIPMENT_NAMES, formatUncertainty } from "@/lib/domain/format/certificate";
import type { EquipmentView } from "@/lib/services/equipment/keep-equipment";
import { DueMark } from "./due-mark";
import { EquipmentDialog } from "./equipment-dialog";

export interface EquipmentListProps {
  items: readonly EquipmentView[];
  /** `YYYY-MM-DD`, UTC. */
  today: string;
  mayWrite: boolean;
}

/** All equipment, what is past its date or soon will be marked. */
export function EquipmentList({ items, today, mayWrite }: EquipmentListProps) {
  const [adding, setAdding] = useState(false);
  const rows = items.map((item) => ({
    ...item,
    kindName: EQUIPMENT_NAMES[item.kind],
    due: dueState(item.calibratedUntil, today),
    uncertaintyText: formatUncertainty(item.kind, item.uncertainty, item.coverageFactor),
  }));
  const add = mayWrite ? (
    <Button look="primary" onClick={() => setAdding(true)}>
      Add equipment
    </Button>
  ) : undefined;
  return (
    <Card aside={rows.length > 0 ? add : undefined} title="Certificates">
      <DataTable
        name="equipment"
        rows={rows}
        rowKey="code"
        rowHref="/equipment/{code}"
        sort={{ key: "code", descending: false }}
        columns={[
          { key: "code", header: "Equipment", format: { as: "code" } },
          {
            key: "due",
            header: "Certificate is",
            cell: (row) => <DueMark calibratedUntil={String(row.calibratedUntil)} today={today} />,
          },
          { key: "kindName", header: "Kind" },
          { key: "certificate", header: "Certificate" },
          { key: "calibratedUntil", header: "Calibrated until", format: { as: "date" } },
          {
            key: "uncertaintyText",
            header: "Uncertainty",
            title: "Expanded, as the certificate gives it, with its coverage factor k",
            format: { as: "code" },
          },
        ]}
        chips={[
          { id: "past", name: "Past its date", key: "due", in: ["overdue"] },
          { id: "soon", name: "Due within 30 days", key: "due", in: ["due-soon"] },
        ]}
        empty={{
          title: "No equipment yet",
          text: "Runs name the sensor, chamber, loads and reader that they were taken with, so that a bad certificate can be traced to devices.",
          action: add,
        }}
      />
      {adding ? <EquipmentDialog onClose={() => setAdding(false)} /> : null}
    </Card>
  );
}
