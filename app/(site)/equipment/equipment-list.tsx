"use client";

import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { StateMark } from "@/app/_components/state/state-mark";
import { DataTable } from "@/app/_components/table/data-table";
import type { EquipmentView } from "@/lib/services/equipment/keep-equipment";
import { EquipmentDialog } from "./equipment-dialog";

export interface EquipmentListProps {
  items: readonly EquipmentView[];
  /** `YYYY-MM-DD`, UTC. */
  today: string;
  mayWrite: boolean;
}

/** All equipment, what is past its date marked. */
export function EquipmentList({ items, today, mayWrite }: EquipmentListProps) {
  const [edited, setEdited] = useState<EquipmentView | "new">();
  const rows = items.map((item) => ({ ...item, valid: item.calibratedUntil >= today }));
  const add = mayWrite ? (
    <Button look="primary" onClick={() => setEdited("new")}>
      Add equipment
    </Button>
  ) : undefined;
  return (
    <Card aside={rows.length > 0 ? add : undefined} title="Certificates">
      <DataTable
        name="equipment"
        rows={rows}
        rowKey="code"
        sort={{ key: "code", descending: false }}
        columns={[
          { key: "code", header: "Equipment", format: { as: "code" } },
          { key: "kind", header: "Kind" },
          { key: "certificate", header: "Certificate" },
          { key: "calibratedUntil", header: "Calibrated until", format: { as: "date" } },
          {
            key: "valid",
            header: "Certificate is",
            format: { as: "yes-no", yes: "in date", no: "past its date" },
            cell: (row) => (
              <StateMark tone={row.valid ? "good" : "bad"} word={row.valid ? "in date" : "past its date"} />
            ),
          },
          {
            key: "uncertainty",
            header: "Uncertainty",
            unit: "°C, kg or mV/V",
            // Kilograms of a mass and degrees of a chamber share the column: each stands with the digits of its certificate.
            format: { as: "code" },
            align: "right",
            title: "Expanded, as the certificate gives it: °C for sensor and chamber, kg for load, mV/V for reader",
          },
          ...(mayWrite
            ? [
                {
                  key: "id",
                  header: "Change",
                  sortable: false,
                  cell: (row: Record<string, unknown>) => (
                    <Button onClick={() => setEdited(items.find((item) => item.id === row.id))}>New certificate</Button>
                  ),
                },
              ]
            : []),
        ]}
        chips={[{ id: "past", name: "Past its date", key: "valid", in: [false] }]}
        empty={{
          title: "No equipment yet",
          text: "Runs name the sensor, chamber, loads and reader that they were taken with, so that a bad certificate can be traced to devices.",
          action: add,
        }}
      />
      {edited ? (
        <EquipmentDialog
          key={edited === "new" ? "new" : edited.id}
          equipment={edited === "new" ? undefined : edited}
          onClose={() => setEdited(undefined)}
        />
      ) : null}
    </Card>
  );
}
