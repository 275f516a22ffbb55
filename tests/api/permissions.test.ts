import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { STATION_KEY_PREFIX } from "@/lib/domain/credentials";
import { type AnyCommand, isUpload } from "@/lib/http/command";
import { commands } from "@/lib/http/registry";
import { keyHashOf } from "@/lib/services/account/find-key-actor";
import { insertAccessKey } from "../support/access-key";
import { type CallOptions, openTestApi, type Reply, type TestApi } from "../support/api";
import type { PersonName } from "../support/people";
import { type Answer, CALLERS, type Caller, PERMISSIONS } from "./permission-table";

const NOTHING = "00000000-0000-7000-8000-000000000000";
/** A value for each parameter of a path; nothing in the database has them. */
const PARAMETERS: Record<string, string> = {
  code: "NONE",
  n: "1",
  version: "9.9.9",
  id: NOTHING,
  serial: "NONE",
  key: NOTHING,
  role: "engineer",
};

let api: TestApi;
let keys: Record<"engineer" | "reviewer" | "admin" | "station", string>;
beforeAll(async () => {
  api = await openTestApi();
  const keyOf = (name: PersonName) => insertAccessKey(api.owner, api.people[name].id);
  keys = {
    engineer: await keyOf("engineer"),
    reviewer: await keyOf("reviewer"),
    admin: await keyOf("admin"),
    station: await insertStation(),
  };
});

async function insertStation(): Promise<string> {
  const [id, createdAt] = [uuidv7(), new Date()];
  const key = `${STATION_KEY_PREFIX}${"s".repeat(43)}`;
  await api.owner
    .insertInto("station")
    .values({ id, name: "Line 1", createdAt, createdBy: api.people.admin.id })
    .execute();
  await api.owner
    .insertInto("stationKey")
    .values({
      id: uuidv7(),
      stationId: id,
      keyHash: keyHashOf(key),
      prefix: key.slice(0, 10),
      createdAt,
      createdBy: api.people.admin.id,
    })
    .execute();
  return key;
}

function credentialOf(caller: Caller): Pick<CallOptions, "as"> {
  if (caller === "nobody") return {};
  if (caller === "station key") return { as: { bearer: keys.station } };
  const [name = ""] = caller.split("'");
  if (caller.endsWith("key")) return { as: { bearer: keys[name as keyof typeof keys] } };
  return { as: name as PersonName };
}

/** A call that is well-formed only as far as rights are concerned: nothing of the database is named, the body is empty. */
async function callAs(caller: Caller, command: AnyCommand): Promise<Reply> {
  const path = command.path.replaceAll(/\{(\w+)\}/g, (_, name: string) => PARAMETERS[name] ?? `no value for ${name}`);
  const upload = isUpload(command.body) ? { "content-type": command.body.upload.contentTypes[0] as string } : undefined;
  return api.call(command.method, path, {
    ...credentialOf(caller),
    ...(upload ? { body: "", headers: upload } : command.body ? { body: {} } : {}),
  });
}

/** The reply as far as rights go. Anything that isn't a refusal of the caller means that they were let in. */
function answerOf({ status, body }: Reply): Answer | string {
  if (status === 401 && body?.code === "auth.required") return "401";
  if (status === 403 && body?.code === "auth.forbidden") return "role";
  if (status === 403 && body?.code === "auth.session_required") return "session";
  return status === 401 || status === 403 || status >= 500 ? `${status} ${body?.code}` : "yes";
}

describe("the table of permissions", () => {
  it("has a whole row for every command, and no other", () => {
    expect([...PERMISSIONS.keys()].sort()).toEqual(commands.map(({ id }) => id).sort());
    for (const [id, row] of PERMISSIONS)
      for (const answer of row.values()) expect(["yes", "401", "role", "session"], id).toContain(answer);
  });

  it("lets an auditor change nothing, and nobody but stations act for a station", () => {
    for (const { id, method, access } of commands) {
      const row = PERMISSIONS.get(id);
      if (method !== "GET" && access.who !== "public" && !id.startsWith("account."))
        expect(row?.get("auditor"), id).toBe("role");
      if (id.startsWith("station."))
        expect(
          [...(row?.values() ?? [])].filter((one) => one === "yes"),
          id,
        ).toHaveLength(1);
    }
  });
});

describe.each(commands.map((command) => ({ id: command.id, command })))("$id", ({ id, command }) => {
  it("answers each caller as the table says", async () => {
    const answers: Record<string, string> = {};
    for (const caller of CALLERS) answers[caller] = answerOf(await callAs(caller, command));
    expect(answers).toEqual(Object.fromEntries(PERMISSIONS.get(id) ?? []));
  });
});
