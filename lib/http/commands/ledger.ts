import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { textStreamOf } from "@/lib/http/stream";
import * as ledger from "@/lib/services/ledger/list-events";
import { verifyLedger as verify } from "@/lib/services/ledger/verify-ledger";
import { ledgerEntryPage, ledgerHead, ledgerPage, ledgerQuery, ledgerVerdict } from "@/schemas/api/ledger";

const readers = { who: "person", roles: READERS } as const;

export const listLedger = command({
  id: "ledger.list",
  method: "GET",
  path: "/ledger",
  summary: "Events exactly as they are hashed",
  access: readers,
  query: ledgerQuery,
  reply: { status: 200, schema: ledgerPage },
  handle: (ctx, { query }) => ledger.listEvents(ctx, query),
});

export const listLedgerEntries = command({
  id: "ledger.list-entries",
  method: "GET",
  path: "/ledger/entries",
  summary: "Events for people: with names, and the texts that were not erased",
  access: readers,
  query: ledgerQuery,
  reply: { status: 200, schema: ledgerEntryPage },
  handle: (ctx, { query }) => ledger.listEntries(ctx, query),
});

export const verifyLedger = command({
  id: "ledger.verify",
  method: "GET",
  path: "/ledger/verify",
  summary: "Walks the whole chain and computes every hash again",
  access: readers,
  reply: { status: 200, schema: ledgerVerdict },
  handle: (ctx) => verify(ctx),
});

export const getLedgerHead = command({
  id: "ledger.head",
  method: "GET",
  path: "/ledger/head",
  summary: "Where the chain ends",
  access: readers,
  reply: { status: 200, schema: ledgerHead },
  handle: (ctx) => ledger.getHead(ctx),
});

export const exportLedger = command({
  id: "ledger.export",
  method: "GET",
  path: "/ledger/export",
  summary: "The whole ledger, a line an event: the bytes that were hashed",
  access: readers,
  reply: {
    status: 200,
    mediaTypes: ["application/x-ndjson"],
    description: "The SHA-256 of a line is the previous of the next; that of the last one stands in Ledger-Head",
  },
  handle: async (ctx) => {
    const { head, lines } = await ledger.openExport(ctx);
    return new Response(textStreamOf(lines), {
      headers: {
        "content-type": "application/x-ndjson",
        "content-disposition": 'attachment; filename="ledger.ndjson"',
        "cache-control": "no-store",
        "ledger-head": head,
      },
    });
  },
});

export const ledgerCommands = [listLedger, listLedgerEntries, verifyLedger, getLedgerHead, exportLedger];
