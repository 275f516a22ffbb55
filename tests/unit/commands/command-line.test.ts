import { type ChildProcess, spawn, spawnSync } from "node:child_process";
import { once } from "node:events";
import { createServer } from "node:net";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { PROGRAMS } from "@/lib/commands/checkout";
import { plainMessage } from "@/lib/commands/command-line";
import { assertDiskSpace, assertPortFree } from "@/lib/commands/start";
import { AppError } from "@/lib/errors";

describe("a plain message", () => {
  const system = (code: string, message: string, path?: string) => Object.assign(new Error(message), { code, path });

  it.each([
    [system("ENOSPC", "ENOSPC: no space left on device, write"), "Disk full: free some space and start again"],
    [new Error("could not extend file: No space left on device"), "Disk full: free some space and start again"],
    [system("EDQUOT", "quota"), "Disk full: this user's quota is used up"],
    [system("53100", "could not extend"), "Disk full: the database cannot write"],
    [system("EACCES", "denied", "/srv/x"), "No permission for /srv/x"],
    [system("EROFS", "read-only", "/srv/x"), "The file system is read-only: /srv/x"],
    [system("ECONNREFUSED", "connect ECONNREFUSED ::1:5432"), "The database does not answer: connection refused"],
    [system("ENOTFOUND", "getaddrinfo"), "The database does not answer: its host is unknown"],
    [system("28P01", "password authentication failed"), "The database refused the password"],
    [system("3D000", 'database "x" does not exist'), 'The database is not there: database "x" does not exist'],
    [new AppError("start.port_taken", { message: "Port 1 is taken" }), "Port 1 is taken"],
    ["thrown text", "thrown text"],
  ])("of %s is one line that says what to do", (error, line) => {
    expect(plainMessage(error)).toBe(line);
    expect(plainMessage(error)).not.toContain("\n");
  });

  it("of a bug keeps the place in the code", () => {
    expect(plainMessage(new TypeError("x is undefined"))).toMatch(/^TypeError: x is undefined\n {4}at /);
  });
});

describe("a start's first looks", () => {
  it("refuse a full disk with what is free and what is needed", () => {
    expect(() => assertDiskSpace(tmpdir(), 1e15)).toThrow(
      expect.objectContaining({
        code: "start.disk_full",
        message: expect.stringMatching(/^Disk full: \d+ MB free in .+, 1000000000 MB needed$/),
      }),
    );
    expect(() => assertDiskSpace(tmpdir(), 1)).not.toThrow();
  });

  it("refuse a port that another program has", async () => {
    const other = createServer().listen(0, "127.0.0.1");
    await once(other, "listening");
    const { port } = other.address() as { port: number };
    await expect(assertPortFree({ host: "127.0.0.1", port })).rejects.toMatchObject({
      code: "start.port_taken",
      message: `Port ${port} on 127.0.0.1 cannot be used, most likely another program has it; choose one with PORT=3001 npm start`,
    });
    other.close();
    await once(other, "close");
    await expect(assertPortFree({ host: "127.0.0.1", port })).resolves.toBeUndefined();
  });
});

describe("the first step of every command", () => {
  const bootstrap = (args: string[], version?: string) => {
    const older = `data:text/javascript,Object.defineProperty(process,"version",{value:"${version}"})`;
    const flags = version === undefined ? [] : ["--import", older];
    return spawnSync(process.execPath, [...flags, PROGRAMS.bootstrap, ...args], { encoding: "utf8" });
  };

  it.each(["v18.20.4", "v20.8.1"])("refuses Node %s in one line", (version) => {
    expect(bootstrap(["start"], version)).toMatchObject({
      status: 1,
      stdout: "",
      stderr: `trimwright: Node 20.9 or newer is needed, this is ${version.slice(1)}\n`,
    });
  });

  it("names the commands when it is given another", () => {
    const result = bootstrap(["stat"]);
    expect(result.status).toBe(1);
    expect(result.stderr).toMatch(/^trimwright: unknown command; known are start, test, check, .+\n$/);
  });
});

describe("a command", () => {
  it("leaves its outcome as the exit code", async () => {
    expect(await outcomeOf(begin("return 4"))).toEqual({ code: 4, stderr: "" });
  });

  it("turns an error into one line and code 1", async () => {
    const failing = begin('throw Object.assign(new Error("x"), { code: "ENOSPC" })');
    expect(await outcomeOf(failing)).toEqual({
      code: 1,
      stderr: "trimwright: Disk full: free some space and start again\n",
    });
  });

  it.each(["SIGINT", "SIGTERM", "SIGHUP"] as const)("is asked to stop by %s and ends in order", async (signal) => {
    const waiting = begin(`${WAIT}; return 0`);
    await once(waiting, "message");
    waiting.kill(signal);
    expect(await outcomeOf(waiting)).toEqual({ code: 0, stderr: "" });
  });

  it("that is stopped amid its work ends with 130 and no complaint", async () => {
    const waiting = begin(`${WAIT}; signal.throwIfAborted()`);
    await once(waiting, "message");
    waiting.kill("SIGINT");
    expect(await outcomeOf(waiting)).toEqual({ code: 130, stderr: "" });
  });

  it("takes two signals at once for one, since a terminal and npm both send it", async () => {
    const slow = begin(`${WAIT}; await new Promise((done) => setTimeout(done, 600)); return 0`);
    await once(slow, "message");
    slow.kill("SIGINT");
    setTimeout(() => slow.kill("SIGINT"), 100);
    expect(await outcomeOf(slow)).toMatchObject({ code: 0 });
  });

  it("ends at once at a second, later signal", async () => {
    const stuck = begin(`${WAIT}; await new Promise((done) => setTimeout(done, 60_000)); return 0`);
    await once(stuck, "message");
    stuck.kill("SIGINT");
    setTimeout(() => stuck.kill("SIGINT"), 1_300);
    expect(await outcomeOf(stuck)).toMatchObject({ code: 130 });
  });

  it("ends although something was left open", async () => {
    expect(await outcomeOf(begin("setInterval(() => undefined, 1000); return 0"))).toMatchObject({ code: 0 });
  });
});

/** Tells the test that it is there, then waits for the signal. */
const WAIT = `
  const awake = setInterval(() => undefined, 1_000);
  process.send("ready");
  await new Promise((stop) => signal.addEventListener("abort", stop));
  clearInterval(awake)`;

/** A process that runs the body as a command; `signal` is its stop signal. */
function begin(body: string): ChildProcess {
  const code = `
    import { runToExitCode } from ${JSON.stringify(join(import.meta.dirname, "../../../lib/commands/command-line.ts"))};
    await runToExitCode(async (signal) => { ${body} });
  `;
  return spawn(process.execPath, ["--import", "tsx", "--input-type=module", "-e", code], {
    stdio: ["ignore", "inherit", "pipe", "ipc"],
  });
}

async function outcomeOf(child: ChildProcess): Promise<{ code: number | null; stderr: string }> {
  let stderr = "";
  child.stderr?.on("data", (data) => (stderr += data));
  const [code] = await once(child, "close");
  return { code, stderr };
}
