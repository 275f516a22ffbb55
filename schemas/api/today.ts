import { z } from "zod";
import { sha256Hex, timestamp } from "./common";

export const todayItem = z.object({
  kind: z.enum([
    "family-revision",
    "layout",
    "derivation",
    "package",
    "waiver",
    "reinstatement",
    "write",
    "device",
    "role",
    "lot",
    "live",
    "run-plan",
  ]),
  title: z.string(),
  detail: z.string().nullable(),
  who: z.string().nullable(),
  at: timestamp,
  tone: z.enum(["good", "wait", "bad", "info", "idle"]),
  link: z.string(),
  digest: sha256Hex.nullable().meta({ description: "Of a live package, for its seal" }),
});

export type TodayItem = z.output<typeof todayItem>;

const items = z.array(todayItem);

/** What waits, by what is to be done about it; a list is empty where it is not this person's to do. */
export const today = z.object({
  decide: items.meta({ description: "To be decided by this person" }),
  release: items.meta({ description: "Approved, to be made live" }),
  awaited: items.meta({ description: "Made or asked for by this person, to be decided by somebody else" }),
  own: items.meta({ description: "Own drafts, and own work that was refused or failed" }),
  planned: items.meta({ description: "Planned runs that wait for their readings; engineers only" }),
  trouble: items.meta({
    description:
      "Live releases that a proof run contradicts, then newest records of serials of the last seven days that are not verified or carry a flag",
  }),
  held: items.meta({ description: "Devices that are held" }),
  people: items.meta({ description: "Roles to confirm" }),
  lots: items.meta({ description: "Newest lots with their next step" }),
  live: items.meta({ description: "What operators write now" }),
});

export type Today = z.output<typeof today>;

export const searchQuery = z.object({
  q: z.string().trim().min(1, "Type a serial, lot, family or package.").max(80),
  limit: z.coerce.number().int().min(1).max(50).default(10),
});

export const searchResult = z.object({
  items: z.array(
    z.object({
      kind: z.enum(["device", "lot", "family", "package"]),
      title: z.string(),
      detail: z.string().nullable(),
      link: z.string(),
      exact: z.boolean().meta({ description: "The text names this very thing" }),
    }),
  ),
});

export type SearchItem = z.output<typeof searchResult>["items"][number];
