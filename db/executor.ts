/** What a query runs on. Queries take {@link Db}; locks take {@link Trx} only, so that none is taken outside a transaction. */
import type { Kysely, Transaction } from "kysely";
import type { DB } from "@/db/generated/types.generated";

/** The pool, or a transaction where one is at hand. */
export type Db = Kysely<DB>;

/** An open transaction. */
export type Trx = Transaction<DB>;
