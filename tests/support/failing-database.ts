/** A database that is lost at a chosen query, as when the process or the connection dies there. */
import type { KyselyPlugin } from "kysely";
import type { Db } from "@/db/executor";

/** @param lostAfter queries that are still answered. */
export function losingDatabase(db: Db, lostAfter: number): Db {
  let asked = 0;
  const plugin: KyselyPlugin = {
    transformQuery: ({ node }) => {
      // SQLSTATE 57P01, admin_shutdown: what PostgreSQL says when it cuts a connection.
      if (++asked > lostAfter) throw Object.assign(new Error("Connection terminated"), { code: "57P01" });
      return node;
    },
    transformResult: async ({ result }) => result,
  };
  return db.withPlugin(plugin) as Db;
}
