"use client";

import { useMemo } from "react";
import { type DataColumn, type Row, valueAt } from "@/app/_components/table/column";
import { DataTable } from "@/app/_components/table/data-table";
import { type DecodedText, decodedNumber, formatDecoded } from "@/lib/domain/format/field-value";

/** A field of the layout with a column of its own. */
export interface ContentField {
  name: string;
  /** In the engineering unit. */
  unit: string;
  shown: boolean;
}

interface DecodedRow {
  fields?: (DecodedText & { name: string })[];
}

/** Every image of a package with its decoded values. */
export function ContentsTable({
  id,
  devices,
  fields,
}: {
  id: string;
  devices: number;
  fields: readonly ContentField[];
}) {
  const columns = useMemo<DataColumn[]>(
    () => [
      { key: "serial", header: "Serial", format: { as: "code" } },
      ...fields.map(
        (field): DataColumn => ({
          key: `values.${field.name}`,
          header: field.name,
          unit: field.unit,
          align: "right",
          format: { as: "code" },
          hidden: !field.shown,
          cell: (row) => String(valueAt(row, `shown.${field.name}`) ?? ""),
        }),
      ),
      { key: "hardwareId", header: "Board", format: { as: "code" }, hidden: true },
      { key: "sha256", header: "SHA-256", format: { as: "digest" } },
    ],
    [fields],
  );
  return (
    <DataTable
      name="images"
      urlName="images"
      endpoint={`/api/v1/packages/${id}/images?values=true`}
      total={devices}
      rowKey="serial"
      rowHref={`/packages/${id}/images/{serial}`}
      toRow={decodedRow}
      columns={columns}
      empty={{ title: "No image", text: "The package holds no device." }}
    />
  );
}

/** Values in engineering units at full precision, for sorting and CSV, and beside them the texts that are shown. */
function decodedRow(row: Row): Row {
  const values: Row = {};
  const shown: Row = {};
  for (const field of (row as DecodedRow).fields ?? []) {
    const { name, value, unit, source } = field;
    values[name] = typeof value === "number" ? decodedNumber(value, unit, source).value : value;
    shown[name] = formatDecoded(field).text;
  }
  return { ...row, values, shown };
}
