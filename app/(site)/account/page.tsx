import type { Metadata } from "next";
import { Notice } from "@/app/_components/notice";
import { TitleRow } from "@/app/_components/title-row";
import { pageContext } from "@/lib/http/page-context";
import { getAccount } from "@/lib/services/account/get-account";
import { listKeys } from "@/lib/services/account/keep-keys";
import { listSessions } from "@/lib/services/account/keep-sessions";
import { KeysCard } from "./keys-card";
import { OneTimeCard } from "./one-time-card";
import { PasswordCard } from "./password-card";
import { SessionsCard } from "./sessions-card";

export const metadata: Metadata = { title: "Account" };

export default async function AccountPage() {
  const ctx = await pageContext("anybody");
  const account = await getAccount(ctx);
  const keys = await listKeys(ctx, { limit: 1_000 });
  const sessions = await listSessions(ctx, { limit: 1_000 });
  const now = ctx.now().toISOString();
  return (
    <>
      <TitleRow title={account.name} note={`${account.email} · ${account.roles.join(", ") || "no role"}`} />
      {account.roles.length === 0 ? (
        <Notice title="You hold no role yet">
          An admin gives you one; reviewer and admin take a second admin to confirm. Until then there is nothing to do
          here.
        </Notice>
      ) : (
        <div className="grid items-start gap-[18px] lg:grid-cols-[minmax(0,1fr)_minmax(0,420px)]">
          <div className="flex min-w-0 flex-col gap-[18px]">
            <KeysCard keys={keys.items} now={now} oneTimeCode={account.oneTimeCode} />
            <SessionsCard sessions={sessions.items} />
          </div>
          <div className="flex min-w-0 flex-col gap-[18px]">
            <PasswordCard oneTimeCode={account.oneTimeCode} />
            <OneTimeCard enrolled={account.oneTimeCode} />
          </div>
        </div>
      )}
    </>
  );
}
