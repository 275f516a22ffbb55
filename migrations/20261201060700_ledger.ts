import { type Kysely, sql } from "kysely";

/** The hash-chained ledger. The chain is checked by the database at every insert; canonical text is stored as hashed. */
export async function up(db: Kysely<never>): Promise<void> {
  await sql`
    create table ledger_event (
      seq bigint primary key,
      at timestamptz not null,
      actor text not null,
      action text not null,
      subject text not null,
      canonical text not null,
      previous bytea not null,
      hash bytea not null
    );
    create index ledger_event_subject on ledger_event (subject, seq);
    create index ledger_event_action on ledger_event (action, seq);

    create table ledger_text (
      seq bigint not null references ledger_event,
      name text not null,
      salt bytea not null,
      content text,
      primary key (seq, name)
    );

    create function guard_ledger() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    declare last_seq bigint; last_hash bytea;
    begin
      perform pg_advisory_xact_lock(7283001);
      select seq, hash into last_seq, last_hash from ledger_event order by seq desc limit 1;
      if new.seq <> coalesce(last_seq, 0) + 1 or new.previous <> coalesce(last_hash, decode(repeat('00', 32), 'hex')) then
        perform refuse('ledger.chain_broken', new.seq::text);
      end if;
      if new.hash <> sha256(convert_to(new.canonical, 'UTF8')) then perform refuse('ledger.hash_wrong', new.seq::text); end if;
      return new;
    end $$;
    create trigger ledger_event_guard before insert on ledger_event for each row execute function guard_ledger();

    create function guard_ledger_text() returns trigger
    language plpgsql set search_path = pg_catalog, public, pg_temp as $$
    begin
      if new.content is not null or (to_jsonb(new) - 'content') is distinct from (to_jsonb(old) - 'content') then
        perform refuse('ledger.text_immutable', old.seq::text);
      end if;
      return new;
    end $$;
    create trigger ledger_text_guard before update on ledger_text for each row execute function guard_ledger_text();
  `.execute(db);
  await sql`
    select make_append_only(array['ledger_event']),
           app_grant('select, insert, update', array['ledger_text'])
  `.execute(db);
}
