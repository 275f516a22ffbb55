/**
 * `npm run rebuild -- package-id …`: builds packages again from the database and compares with what was built: every value derived
 * anew from the readings as they were uploaded, and every byte composed anew from the stored coefficients.
 * Writes nothing. Ends with 1 where one differs.
 */
import { closeDb, getDb } from "@/db/client";
import type { Db } from "@/db/executor";
import { isUuid } from "@/db/queries/code-or-id";
import { getPackage } from "@/db/queries/packages";
import { findStartedDatabase } from "@/lib/commands/start-database";
import { env, setEnv } from "@/lib/env";
import { AppError } from "@/lib/errors";
import { type RepeatDifference, repeatBuild } from "@/lib/services/packages/repeat-build";
import type { RepeatedDerivation } from "@/lib/services/packages/repeat-derivations";

const USAGE = "Usage: npm run rebuild -- package-id …";

export default async function rebuild(args: string[]): Promise<number> {
  if (args.length === 0 || !args.every(isUuid)) throw new AppError("command.usage", { message: USAGE });
  await chooseDatabase();
  try {
    let differing = 0;
    for (const id of args) if (!(await rebuildOne(getDb(), id))) differing++;
    return differing === 0 ? 0 : 1;
  } finally {
    await closeDb();
  }
}

/** The database of DATABASE_URL, else that of the start that runs with this home. @throws AppError `settings.invalid` */
async function chooseDatabase(): Promise<void> {
  const { databaseUrl, home } = env();
  if (databaseUrl !== undefined) return;
  const started = await findStartedDatabase(home);
  if (started === undefined) {
    const message = `No database: run npm start beside this (none runs with ${home}), or set DATABASE_URL`;
    throw new AppError("settings.invalid", { message });
  }
  setEnv({ DATABASE_URL: started });
}

/** @returns whether every byte came out as it was built. */
async function rebuildOne(db: Db, id: string): Promise<boolean> {
  const pkg = await getPackage(db, id);
  console.log(`${pkg.lotCode} ${pkg.version} (${pkg.state}): built as ${pkg.digest?.toString("hex") ?? "nothing"}`);
  const { same, differs, derivations } = await repeatBuild(db, pkg);
  for (const one of derivations) console.log(derivationLine(one));
  for (const line of differs ? linesOf(differs) : []) console.log(line);
  console.log(same ? "The same bytes." : "DIFFERS.");
  return same;
}

function derivationLine({ id, done, reason, devices, differing, serials }: RepeatedDerivation): string {
  if (!done) return `Derivation ${id}: not derived again (${reason})`;
  if (differing === 0)
    return `Derivation ${id}: derived again from its readings, the same values of ${devices} devices`;
  return `Derivation ${id}: DIFFERS in ${differing} of ${devices} devices, ${serials.join(", ")} among them`;
}

function linesOf({ repeated, files, images, serials, failure }: RepeatDifference): string[] {
  const lines = [repeated === null ? "Nothing came out." : `Came out as ${repeated}`];
  if (failure) lines.push(`${failure.code}: ${failure.message}`);
  if (files.length > 0) lines.push(`Files that differ: ${files.join(", ")}`);
  if (images > 0) lines.push(`Images that differ: ${images}, ${serials.join(", ")} among them`);
  return lines;
}
