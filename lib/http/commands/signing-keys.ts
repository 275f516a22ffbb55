import { listSigningKeys as list } from "@/lib/services/signing-keys/list-signing-keys";
import { signingKeyList } from "@/schemas/api/signing-keys";
import { command } from "../command";

export const listSigningKeys = command({
  id: "signing-keys.list",
  method: "GET",
  path: "/signing-keys",
  summary: "Public keys that releases are signed with, and when each was in use",
  access: { who: "public" },
  reply: { status: 200, schema: signingKeyList },
  handle: (ctx) => list(ctx),
});

export const signingKeyCommands = [listSigningKeys];
