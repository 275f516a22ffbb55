"use client";

import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import type { StationView } from "@/lib/services/stations/manage-stations";
import { StationDialog } from "./station-dialog";

export interface StationListProps {
  stations: readonly StationView[];
  /** Codes of all families; for admins only. */
  families: readonly string[];
  admin: boolean;
}

/** All stations by name; an admin adds one. */
export function StationList({ stations, families, admin }: StationListProps) {
  const [adding, setAdding] = useState(false);
  const rows = stations.map((station) => ({
    ...station,
    state: station.active ? "active" : "stopped",
    goodKeys: station.keys.filter((key) => key.revokedAt === null).length,
  }));
  const add = admin ? (
    <Button look="primary" onClick={() => setAdding(true)}>
      Add a station
    </Button>
  ) : undefined;
  return (
    <Card title={rows.length > 0 ? "All stations" : undefined} aside={rows.length > 0 ? add : undefined}>
      <DataTable
        name="stations"
        rows={rows}
        rowKey="id"
        rowHref="/stations/{id}"
        columns={[
          { key: "name", header: "Name" },
          { key: "state", header: "State", format: { as: "state", kind: "station" } },
          { key: "families", header: "May write" },
          { key: "lastSeenAt", header: "Last seen", format: { as: "time" } },
          { key: "goodKeys", header: "Keys in use", format: { as: "count" } },
          { key: "createdAt", header: "Added", unit: "UTC", format: { as: "date" }, hidden: true },
        ]}
        chips={[{ id: "stopped", name: "Stopped", key: "active", in: [false] }]}
        empty={{
          title: "No stations yet",
          text: admin
            ? "A station is a programming bench with a key of its own. Add one, name the families it may write, and make a key for it."
            : "An admin adds them.",
          action: add,
        }}
      />
      {adding ? <StationDialog families={families} onClose={() => setAdding(false)} /> : null}
    </Card>
  );
}
