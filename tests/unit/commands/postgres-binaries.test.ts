import { mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeEach, describe, expect, it } from "vitest";
import { listPostgres } from "@/db/postgres-binaries";
import { ensurePostgres } from "@/lib/commands/ensure-postgres";

const folder = mkdtempSync(join(tmpdir(), "trimwright-binaries-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

let home = "";
let system = "";
let count = 0;
beforeEach(() => {
  count += 1;
  home = join(folder, `${count}/home`);
  system = join(folder, `${count}/system`);
  for (const path of [home, system]) mkdirSync(path, { recursive: true });
});

function addVersion(root: string, version: string, program = "postgres"): string {
  const bin = join(root, "usr/lib/postgresql", version, "bin");
  mkdirSync(bin, { recursive: true });
  writeFileSync(join(bin, program), "");
  return bin;
}

describe("PostgreSQL's programs", () => {
  it("are nowhere on a bare machine", () => {
    expect(listPostgres(home, system)).toEqual([]);
  });

  it("are listed newest first, by number and not by letters", () => {
    for (const version of ["9", "15", "17"]) addVersion(system, version);
    expect(listPostgres(home, system).map(({ major }) => major)).toEqual([17, 15, 9]);
  });

  it("are the system's before a private copy of the same version, a newer private copy before both", () => {
    const privateRoot = join(home, "debian");
    const installed = addVersion(system, "15");
    const unpacked = addVersion(privateRoot, "15");
    const newer = addVersion(privateRoot, "16");
    mkdirSync(join(privateRoot, "usr/lib/x86_64-linux-gnu"), { recursive: true });
    expect(listPostgres(home, system).map(({ bin }) => bin)).toEqual([newer, installed, unpacked]);
  });

  it("find their libraries beside a private copy only", () => {
    const privateRoot = join(home, "debian");
    addVersion(system, "15");
    addVersion(privateRoot, "15");
    mkdirSync(join(privateRoot, "usr/lib/x86_64-linux-gnu"));
    expect(listPostgres(home, system).map(({ env }) => env)).toEqual([
      {},
      { LD_LIBRARY_PATH: join(privateRoot, "usr/lib/x86_64-linux-gnu") },
    ]);
  });

  it("are not taken from a folder without a server, or one that is no version", () => {
    addVersion(system, "15", "pg_dump");
    addVersion(system, "common");
    expect(listPostgres(home, system)).toEqual([]);
  });
});

describe("a machine without PostgreSQL", () => {
  it("is told what to install where there is no apt-get", async () => {
    await expect(ensurePostgres({ home, system, aptGet: "/nowhere/apt-get" })).rejects.toMatchObject({
      code: "database.not_installed",
      message: expect.stringMatching(
        /^PostgreSQL is not installed and .+ has no apt-get to install it; install PostgreSQL 15 or newer, or set DATABASE_URL and TRIMWRIGHT_OWNER_URL$/,
      ),
    });
  });

  it("is told apt-get's reason when the packages cannot be had", async () => {
    const aptGet = join(folder, "apt-get");
    writeFileSync(aptGet, "#!/bin/sh\necho 'E: Unable to fetch some archives' >&2\nexit 100\n", { mode: 0o755 });
    const said: string[] = [];
    await expect(ensurePostgres({ home, system, aptGet, say: (line) => said.push(line) })).rejects.toMatchObject({
      code: "packages.not_installed",
      message: expect.stringMatching(/^Debian's postgresql could not be had: .*E: Unable to fetch some archives$/),
    });
    expect(said).toEqual(["Installing PostgreSQL from Debian …"]);
  });

  // Only root installs, and so meets the lock of the whole machine.
  it.runIf(process.getuid?.() === 0)("waits for an apt-get that is at work", async () => {
    const aptGet = join(folder, "busy-apt-get");
    const lock = "E: Could not get lock /var/lib/dpkg/lock-frontend. It is held by process 7 (apt-get)";
    const script = `echo >> '${home}/calls'; [ $(wc -l < '${home}/calls') -gt 2 ] || { echo '${lock}' >&2; exit 100; }`;
    writeFileSync(aptGet, `#!/bin/sh\n${script}\n`, { mode: 0o755 });
    await expect(ensurePostgres({ home, system, aptGet })).resolves.toBeUndefined();
    expect(readFileSync(join(home, "calls"), "utf8")).toBe("\n".repeat(4));
  });

  it("is left alone when there is one", async () => {
    addVersion(system, "15");
    await expect(ensurePostgres({ home, system, aptGet: "/nowhere/apt-get" })).resolves.toBeUndefined();
  });
});
