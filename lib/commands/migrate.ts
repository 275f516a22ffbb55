/** `npm run migrate`: migrates the database that TRIMWRIGHT_OWNER_URL names, for the role of DATABASE_URL. */
import { credentialsOf } from "@/db/databases";
import { migrateDatabase } from "@/db/migrate";
import { APP_ROLE } from "@/db/roles";
import { env } from "@/lib/env";
import { AppError } from "@/lib/errors";

export default async function migrate(): Promise<number> {
  const { ownerUrl, databaseUrl } = env();
  if (ownerUrl === undefined) {
    throw new AppError("settings.invalid", {
      message: "Set TRIMWRIGHT_OWNER_URL; npm start migrates its own database",
    });
  }
  const appRole = databaseUrl === undefined ? APP_ROLE : credentialsOf(databaseUrl).name;
  const applied = await migrateDatabase({ ownerUrl, appRole });
  for (const name of applied) console.log(`applied ${name}`);
  console.log(applied.length === 0 ? "The database is up to date." : `${applied.length} migrations applied.`);
  return 0;
}
