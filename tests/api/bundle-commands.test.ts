/** `npm run verify` and `npm run rebuild` on a bundle that came through the API. */
import { spawn } from "node:child_process";
import { once } from "node:events";
import { mkdirSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { text } from "node:stream/consumers";
import { CompiledQuery } from "kysely";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it, vi } from "vitest";
import { type Command, plainMessage } from "@/lib/commands/command-line";
import rebuild from "@/lib/commands/rebuild";
import verify from "@/lib/commands/verify";
import { childEnv, env, setEnv } from "@/lib/env";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { inFolder } from "../support/programs";
import { arrangeDerived } from "../support/scenario/derived";
import { arrangeReleased, type BuiltPackage, buildGolden } from "../support/scenario/packaged";
import { unpacked } from "../support/unpacked-bundle";

const CHECKOUT = join(import.meta.dirname, "../..");

let api: TestApi;
let released: BuiltPackage;
let draft: BuiltPackage;
let bundle: Buffer;
let key: { keyId: string; pem: string };

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const lot = await arrangeDerived(people);
  released = await arrangeReleased(people, lot);
  draft = await buildGolden(people, lot);
  bundle = (await api.call("GET", `/packages/${released.id}/bundle`, { as: "service" })).body;
  key = (await api.call("GET", "/signing-keys")).body.items[0];
});

interface Outcome {
  status: number;
  stdout: string;
  stderr: string;
}

/** Runs a command in this process, called from a folder, with what a process of its own would end with. */
async function run(folder: string, command: Command, ...args: string[]): Promise<Outcome> {
  setEnv({ INIT_CWD: folder });
  const lines: string[] = [];
  const log = vi.spyOn(console, "log").mockImplementation((line: string) => lines.push(line));
  try {
    const status = await command(args, new AbortController().signal);
    return { status, stdout: lines.join("\n"), stderr: "" };
  } catch (error) {
    return { status: 1, stdout: lines.join("\n"), stderr: plainMessage(error) };
  } finally {
    log.mockRestore();
  }
}

/** Starts a command as npm does. */
async function start(folder: string, name: string, ...args: string[]): Promise<Outcome> {
  const env = childEnv({ INIT_CWD: folder, npm_lifecycle_event: undefined });
  const child = spawn(process.execPath, [join(CHECKOUT, "lib/commands/bootstrap.mjs"), name, ...args], { env });
  const [stdout, stderr, [status]] = await Promise.all([
    text(child.stdout),
    text(child.stderr),
    once(child, "close") as Promise<[number]>,
  ]);
  return { status, stdout, stderr };
}

describe("verify", () => {
  const inBundleFolder = (use: (folder: string) => Promise<void>, bytes = bundle) =>
    inFolder(async (folder) => {
      writeFileSync(join(folder, "bundle.zip"), bytes);
      writeFileSync(join(folder, "key.pem"), key.pem);
      await use(folder);
    });

  it("prints every step and ends with 0 for a released bundle, the key compared by id or by file", async () => {
    await inBundleFolder(async (folder) => {
      for (const trusted of [key.keyId, "key.pem"]) {
        const { status, stdout } = await run(folder, verify, "bundle.zip", "--key", trusted);
        expect({ trusted, status, last: stdout.trim().split("\n").at(-1) }).toEqual({
          trusted,
          status: 0,
          last: "Verified.",
        });
        expect(stdout).not.toContain("REFUSED");
        expect(stdout.split("\n").filter((line) => line.startsWith("ok"))).toHaveLength(9);
      }
    });
  });

  it("says to compare the key where none is given", async () => {
    await inBundleFolder(async (folder) => {
      const { status, stdout } = await run(folder, verify, "bundle.zip");
      expect(status).toBe(0);
      expect(stdout).toContain(`The key is ${key.keyId}: compare it`);
    });
  });

  it("reads a bundle that was unpacked", async () => {
    await unpacked(bundle, async (folder) => {
      expect((await run(folder, verify, ".", "--key", key.keyId)).status).toBe(0);
      mkdirSync(join(folder, "more"));
      writeFileSync(join(folder, "more/notes.txt"), "x");
      const { status, stdout } = await run(folder, verify, ".", "--key", key.keyId);
      expect(status).toBe(1);
      expect(stdout).toContain("REFUSED  files");
    });
  });

  it("refuses another key, a changed byte and a preview with 1", async () => {
    await inBundleFolder(async (folder) => {
      const other = await run(folder, verify, "bundle.zip", "--key", "0123456789abcdef");
      expect(other.status).toBe(1);
      expect(other.stdout).toContain("REFUSED  key");
    });
    const changed = Buffer.from(bundle);
    changed[Math.floor(changed.length / 2)] = (changed[Math.floor(changed.length / 2)] as number) ^ 1;
    await inBundleFolder(async (folder) => expect((await run(folder, verify, "bundle.zip")).status).toBe(1), changed);
    const preview = (await api.call("GET", `/packages/${draft.id}/bundle`, { as: "service" })).body;
    await inBundleFolder(async (folder) => {
      const { status, stdout } = await run(folder, verify, "bundle.zip");
      expect(status).toBe(1);
      expect(stdout).toContain("This is a preview");
    }, preview);
  });

  it("says in one line how it is used, or that there is no such file", async () => {
    await inFolder(async (folder) => {
      expect(await run(folder, verify)).toMatchObject({
        status: 1,
        stderr: expect.stringMatching(/^Usage: /),
      });
      expect((await run(folder, verify, "a", "--what")).stderr).toMatch(/^Usage: /);
      expect((await run(folder, verify, "none.zip")).stderr).toMatch(/^There is no file .*none\.zip$/);
    });
  });
});

describe("as processes of their own", () => {
  it("both end with 0 where all is well and with one line on standard error where not", {
    timeout: 240_000,
  }, async () => {
    await inFolder(async (folder) => {
      writeFileSync(join(folder, "bundle.zip"), bundle);
      expect((await start(folder, "verify", "bundle.zip", "--key", key.keyId)).status).toBe(0);
      expect(await start(folder, "rebuild", released.id)).toMatchObject({ status: 0, stderr: "" });
      const usage = await start(folder, "verify");
      expect(usage).toMatchObject({ status: 1, stderr: expect.stringMatching(/^trimwright: Usage: [^\n]*\n$/) });
    });
  });
});

describe("rebuild", () => {
  it("finds the same bytes and ends with 0, writing nothing", async () => {
    const before = await api.db
      .selectFrom("ledgerEvent")
      .select((eb) => eb.fn.countAll().as("count"))
      .executeTakeFirst();
    const { status, stdout } = await run(CHECKOUT, rebuild, released.id, draft.id);
    expect(status).toBe(0);
    expect(stdout.match(/^The same bytes\.$/gm)).toHaveLength(2);
    expect(stdout).toMatch(/^Derivation \S+: derived again from its readings, the same values of 28 devices$/m);
    expect(stdout).toContain(`MW20-2609 ${released.version} (live): built as `);
    const after = await api.db
      .selectFrom("ledgerEvent")
      .select((eb) => eb.fn.countAll().as("count"))
      .executeTakeFirst();
    expect(after).toEqual(before);
  });

  it("names what differs and ends with 1", async () => {
    const image = await api.db
      .selectFrom("image")
      .select(["coefficientSetId", "serial"])
      .where("packageId", "=", draft.id)
      .orderBy("serial")
      .limit(1)
      .executeTakeFirstOrThrow();
    await api.owner.transaction().execute(async (trx) => {
      await trx.executeQuery(CompiledQuery.raw("alter table coefficient_set disable trigger user"));
      await trx.updateTable("coefficientSet").set({ zero: 0.123 }).where("id", "=", image.coefficientSetId).execute();
      await trx.executeQuery(CompiledQuery.raw("alter table coefficient_set enable trigger user"));
    });
    const { status, stdout } = await run(CHECKOUT, rebuild, draft.id);
    expect(status).toBe(1);
    expect(stdout).toContain(`Images that differ: 1, ${image.serial} among them`);
    expect(stdout).toContain(`DIFFERS in 1 of 28 devices, ${image.serial} among them`);
    expect(stdout).toContain("DIFFERS.");
  });

  it("says in one line what is wrong with its arguments", async () => {
    expect(await run(CHECKOUT, rebuild)).toMatchObject({
      status: 1,
      stderr: expect.stringMatching(/^Usage: /),
    });
    expect((await run(CHECKOUT, rebuild, uuidv7())).stderr).toBe("There is no such package.");
  });

  it("asks for a database where no start runs with the home", async () => {
    const databaseUrl = env().databaseUrl ?? "";
    await inFolder(async (home) => {
      setEnv({ DATABASE_URL: "", TRIMWRIGHT_HOME: home });
      const { status, stderr } = await run(CHECKOUT, rebuild, draft.id);
      setEnv({ DATABASE_URL: databaseUrl });
      expect({ status, stderr }).toMatchObject({
        status: 1,
        stderr: expect.stringMatching(/^No database: run npm start/),
      });
    });
  });
});
