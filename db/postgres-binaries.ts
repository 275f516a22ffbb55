/** Where PostgreSQL's programs are on this machine. */
import { existsSync, readdirSync } from "node:fs";
import { join } from "node:path";

export interface PostgresBinaries {
  /** Folder with `postgres`, `initdb` and `pg_ctl`. */
  bin: string;
  /** Major version, such as 15. */
  major: number;
  /** Variables the programs need: a private copy has its libraries beside it. */
  env: Record<string, string>;
}

/** Folder below a home that Debian packages are unpacked into when nobody may install them. */
export function privatePackagesFolder(home: string): string {
  return join(home, "debian");
}

/** Every PostgreSQL here, newest first; the system's before a private one of the same version. */
export function listPostgres(home: string, system = "/"): PostgresBinaries[] {
  const installed = versionsBelow(system).map((found) => ({ ...found, env: {} }));
  const unpacked = versionsBelow(privatePackagesFolder(home));
  return [...installed, ...unpacked].sort((a, b) => b.major - a.major);
}

function versionsBelow(root: string): PostgresBinaries[] {
  const folder = join(root, "usr/lib/postgresql");
  if (!existsSync(folder)) return [];
  return readdirSync(folder)
    .map((name) => ({ bin: join(folder, name, "bin"), major: Number(name), env: libraryPath(root) }))
    .filter(({ bin, major }) => Number.isInteger(major) && existsSync(join(bin, "postgres")));
}

/** The dynamic linker's search path for a private copy; Debian keeps libraries in one folder per architecture. */
function libraryPath(root: string): Record<string, string> {
  const lib = join(root, "usr/lib");
  const folders = readdirSync(lib).filter((name) => name.includes("-linux-gnu"));
  return { LD_LIBRARY_PATH: folders.map((name) => join(lib, name)).join(":") };
}
