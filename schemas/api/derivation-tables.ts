import { z } from "zod";
import { id, pageQuery } from "./common";

export const XLSX_TYPE = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet";

/** A page as JSON; `format` asks for the whole table as a file, for links that can't set `Accept`. */
export const devicesQuery = pageQuery.extend({
  format: z
    .enum(["json", "csv", "xlsx"])
    .optional()
    .meta({ description: "Instead of Accept: all devices at once as text/csv or as a workbook" }),
});

export const setPackages = z.object({
  items: z.array(
    z.object({
      id,
      version: z.string(),
      state: z.string(),
      devices: z.number().int().meta({ description: "Images that carry coefficients of the derivation" }),
    }),
  ),
});

export type SetPackage = z.output<typeof setPackages>["items"][number];
