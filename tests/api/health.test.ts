import { createServer, type Server } from "node:net";
import pg from "pg";
import { afterEach, beforeAll, describe, expect, it } from "vitest";
import { env, setEnv } from "@/lib/env";
import { QUEUES, WORKER_NAME } from "@/lib/jobs/queues";
import packageJson from "@/package.json";
import { openTestApi, type TestApi } from "../support/api";

let api: TestApi;
let databaseUrl: string;
beforeAll(async () => {
  api = await openTestApi();
  databaseUrl = env().databaseUrl ?? "";
});
afterEach(() => setEnv({ DATABASE_URL: databaseUrl }));

/** A connection as the worker has it. */
async function connectWorker(): Promise<pg.Client> {
  const worker = new pg.Client({ connectionString: databaseUrl, application_name: WORKER_NAME });
  await worker.connect();
  return worker;
}

const health = () => api.call("GET", "/api/health");
const { version } = packageJson;

describe("health", () => {
  it("is good with a database, its queues and a worker, and asks for no credential", async () => {
    const worker = await connectWorker();
    try {
      const reply = await health();
      expect(reply.status).toBe(200);
      expect(reply.body).toEqual({ status: "ok", database: "ok", queue: "ok", version });
      expect(reply.headers.get("cache-control")).toBe("no-store");
      const many = await Promise.all(Array.from({ length: 50 }, health));
      expect(new Set(many.map(({ status }) => status))).toEqual(new Set([200]));
    } finally {
      await worker.end();
    }
  });

  it("names the queue where nobody takes jobs, or one of the queues is missing", async () => {
    expect(await health()).toMatchObject({ status: 503, body: { status: "down", database: "ok", queue: "down" } });
    const worker = await connectWorker();
    try {
      await api.owner
        .withSchema("pgboss")
        .deleteFrom("queue" as never)
        .where("name" as never, "=", QUEUES[0] as never)
        .execute();
      expect(await health()).toMatchObject({ status: 503, body: { database: "ok", queue: "down" } });
    } finally {
      await worker.end();
    }
  });

  it("names the database where it is dead, refuses us, or takes the connection and says nothing", async () => {
    const silent = await listenSilently();
    const dead = databaseUrl.replace(/:\d+\//, ":1/");
    const stranger = databaseUrl.replace(/\/\/[^:]+:/, "//nobody:");
    const mute = databaseUrl.replace(/:\d+\//, `:${silent.port}/`);
    try {
      for (const url of [dead, stranger, mute]) {
        setEnv({ DATABASE_URL: url });
        const reply = await health();
        expect(reply.status).toBe(503);
        expect(reply.body).toEqual({ status: "down", database: "down", queue: "down", version });
      }
    } finally {
      silent.server.close();
    }
  });

  it("is good again once the database is", async () => {
    expect(await health()).toMatchObject({ body: { database: "ok" } });
  });
});

async function listenSilently(): Promise<{ server: Server; port: number }> {
  const server = createServer((socket) => socket.on("error", () => undefined).unref()).unref();
  await new Promise<void>((resolve) => server.listen(0, "127.0.0.1", resolve));
  const address = server.address();
  return { server, port: typeof address === "object" && address !== null ? address.port : 0 };
}
