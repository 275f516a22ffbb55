/** Sees to it that PostgreSQL's programs are on this machine. */
import { listPostgres } from "@/db/postgres-binaries";
import {
  type InstallOptions,
  installPackages,
  isDebian,
  mayInstall,
  systemName,
  unpackPackages,
} from "@/lib/commands/debian";
import { AppError } from "@/lib/errors";

export interface PostgresOptions extends InstallOptions {
  say?: (line: string) => void;
  /** Root of the system's own programs, where a test puts an empty one in its place. */
  system?: string;
}

/**
 * Installs Debian's PostgreSQL, or unpacks it below the home without root, if no version is here.
 * @param say told what is being done, only when something is.
 * @throws AppError `database.not_installed` where there is no apt-get; `packages.not_installed` when it fails.
 */
export async function ensurePostgres(options: PostgresOptions): Promise<void> {
  if (listPostgres(options.home, options.system).length > 0) return;
  if (!isDebian(options)) {
    throw new AppError("database.not_installed", {
      message: `PostgreSQL is not installed and ${systemName()} has no apt-get to install it; install PostgreSQL 15 or newer, or set DATABASE_URL and TRIMWRIGHT_OWNER_URL`,
    });
  }
  options.say?.("Installing PostgreSQL from Debian …");
  if (mayInstall()) await installPackages(["postgresql"], options);
  else await unpackPackages(["postgresql"], options);
}
