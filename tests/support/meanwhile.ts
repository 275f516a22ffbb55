/** A database in whose use there is a pause, as long work makes them for others, and in which somebody else does something. */
import type { KyselyPlugin } from "kysely";
import type { Db } from "@/db/executor";

/**
 * @param words of the first statement after whose answer the pause comes.
 * @param work what the other one does; the statement's answer waits for it.
 */
export function withMeanwhile(db: Db, words: string, work: () => Promise<unknown>): Db {
  const awaited = new WeakSet<object>();
  let done = false;
  const plugin: KyselyPlugin = {
    transformQuery: ({ node, queryId }) => {
      if (!done && JSON.stringify(node).includes(words)) awaited.add(queryId);
      return node;
    },
    transformResult: async ({ result, queryId }) => {
      if (done || !awaited.has(queryId)) return result;
      done = true;
      await work();
      return result;
    },
  };
  return db.withPlugin(plugin) as Db;
}
