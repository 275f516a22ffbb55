/**
 * The tests' own PostgreSQL server in `.local-test`: started by the first process that needs it, stopped by the last.
 * Each user leaves a file with its process number; files of dead processes do not count.
 */
import { mkdirSync, readdirSync, rmSync } from "node:fs";
import { join } from "node:path";
import { type LocalServer, startLocalServer } from "@/db/local-server";
import { CHECKOUT } from "@/lib/commands/checkout";
import { ensurePostgres } from "@/lib/commands/ensure-postgres";
import { findHolder, tryLock, waitForLock } from "@/lib/commands/process-lock";

export const TEST_HOME = join(CHECKOUT, ".local-test");
const USERS = join(TEST_HOME, "users");
const GATE = join(TEST_HOME, "server.lock");

export interface TestServer {
  /** Connection of the superuser. */
  url: string;
  /** Lets go; the last user stops the server. */
  release(): Promise<void>;
}

/** The running test server; starts it if this process is its first user. */
export async function joinTestServer(): Promise<TestServer> {
  mkdirSync(USERS, { recursive: true });
  const gate = await waitForLock(GATE);
  try {
    await ensurePostgres({ home: TEST_HOME });
    const server = await startLocalServer({ home: TEST_HOME, fsync: false, maxConnections: 300 });
    const user = tryLock(join(USERS, String(process.pid)));
    return {
      url: server.urlOf("postgres"),
      release: () => leave(server, "release" in user ? user.release : () => undefined),
    };
  } finally {
    gate.release();
  }
}

async function leave(server: LocalServer, removeOwn: () => void): Promise<void> {
  const gate = await waitForLock(GATE);
  try {
    removeOwn();
    const others = readdirSync(USERS).filter((name) => {
      const alive = findHolder(join(USERS, name)) !== undefined;
      if (!alive) rmSync(join(USERS, name), { force: true });
      return alive;
    });
    if (others.length === 0) await server.stop();
  } finally {
    gate.release();
  }
}
