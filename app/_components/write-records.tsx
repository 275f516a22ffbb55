"use client";

import { DataTable } from "@/app/_components/table/data-table";
import { FlagMeanings } from "@/app/_components/write-flags";

export interface WriteRecordsProps {
  /** API list that answers them. */
  endpoint: string;
  /** Names the CSV file. */
  name: string;
  /** In front of the address's parameters, where a page has several tables. */
  urlName?: string;
  /** Shown beside the serial: who wrote, unless all are of one station. */
  ofOneStation?: boolean;
  empty: { title: string; text: string };
}

/** What stations reported, newest received first. */
export function WriteRecords({ endpoint, name, urlName, ofOneStation, empty }: WriteRecordsProps) {
  return (
    <>
      <DataTable
        name={name}
        urlName={urlName}
        endpoint={endpoint}
        rowKey="id"
        rowHref="/trace/{serial}"
        columns={[
          { key: "serial", header: "Serial", format: { as: "code" } },
          { key: "outcome", header: "Outcome", format: { as: "state", kind: "write-outcome" } },
          { key: "flags", header: "Flags" },
          { key: "version", header: "Package" },
          { key: "finishedAt", header: "Finished", format: { as: "time" } },
          ...(ofOneStation ? [] : [{ key: "station", header: "Station" }]),
          { key: "operator", header: "Operator" },
          { key: "detail", header: "Detail" },
          { key: "counter", header: "Counter", format: { as: "figure", digits: 0 }, hidden: true },
          { key: "imageSha256", header: "Image", format: { as: "digest" }, hidden: true },
          { key: "readbackSha256", header: "Read back", format: { as: "digest" }, hidden: true },
          { key: "hardwareId", header: "Board", format: { as: "code" }, hidden: true },
          { key: "startedAt", header: "Started", format: { as: "time" }, hidden: true },
          { key: "receivedAt", header: "Received", format: { as: "time" }, hidden: true },
        ]}
        chips={[
          {
            id: "trouble",
            name: "Not verified",
            key: "outcome",
            in: ["mismatch", "failed", "interrupted", "unknown-image", "unknown-serial"],
          },
          { id: "flagged", name: "Flagged", key: "flags.length", above: 0 },
        ]}
        empty={empty}
      />
      <FlagMeanings />
    </>
  );
}
