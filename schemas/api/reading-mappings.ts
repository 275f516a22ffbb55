import { z } from "zod";
import { DELIMITERS } from "@/lib/domain/readings/delimited-text";
import { ENCODINGS } from "@/lib/domain/readings/encoding";
import { ALL_COLUMNS, OFFSET } from "@/lib/domain/readings/map-table";
import { timestamp } from "./common";

const printable = (text: string) => !/\p{C}/u.test(text);
const columnName = z
  .string()
  .min(1)
  .max(256)
  .refine(printable, "Takes no control characters.")
  .meta({ description: "Name of the column in the table, or #3 by its place" });

/** How the tables of a family are read: proposed to whoever uploads next, never applied unseen. */
export const readingMapping = z.strictObject({
  columns: z.partialRecord(z.enum(ALL_COLUMNS as [string, ...string[]] as [(typeof ALL_COLUMNS)[number]]), columnName),
  headerRow: z.boolean(),
  decimalComma: z.boolean(),
  offset: z
    .string()
    .refine((text) => text === "" || OFFSET.test(text), "Takes Z or an offset such as +01:00, or nothing.")
    .meta({ description: "Offset of times that name none; empty where all of them name theirs" }),
  encoding: z.enum(ENCODINGS).nullable(),
  delimiter: z.enum(DELIMITERS).nullable(),
  sheet: z
    .string()
    .max(255)
    .refine(printable, "Takes no control characters.")
    .nullable()
    .meta({ description: "Sheet of a workbook, null for text files" }),
});

export const keptMapping = z.object({
  mapping: readingMapping.nullable().meta({ description: "Null where none was accepted yet" }),
  updatedAt: timestamp.nullable(),
  updatedBy: z.string().nullable(),
});
