import type { Metadata } from "next";
import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { Notice } from "@/app/_components/notice";
import { stateOf } from "@/app/_components/state/state-of";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { getMail, mayMailLeave } from "@/lib/services/mail/read-mail";
import { AdminsOnly } from "../admins-only";
import { MessageText } from "./message-text";
import { SendAgain } from "./send-again";

export const metadata: Metadata = { title: "Message" };

export default async function MessagePage({ params }: { params: Promise<{ message: string }> }) {
  const ctx = await pageContext();
  if (!holds(ctx, "admin")) return <AdminsOnly />;
  const mail = await orNotFound(getMail(ctx, (await params).message));
  const maySend = mail.state === "failed" || (mail.state === "kept" && mayMailLeave());
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Mail", href: "/mail" }, { name: mail.subject }]}
        title={mail.subject}
        state={stateOf("mail", mail.state)}
        actions={maySend ? <SendAgain id={mail.id} /> : undefined}
      />
      <div className="flex max-w-[820px] flex-col gap-[18px]">
        {mail.lastError ? (
          <Notice
            tone="bad"
            title={`Not sent after ${mail.attempts === 1 ? "one attempt" : `${mail.attempts} attempts`}`}
          >
            <span className="font-mono break-words">{mail.lastError}</span>
          </Notice>
        ) : null}
        <Card>
          <Facts
            small
            facts={[
              { label: "To", value: mail.to },
              { label: "Queued", value: <TimeText at={mail.createdAt} /> },
              { label: "Sent", value: mail.sentAt ? <TimeText at={mail.sentAt} /> : "no" },
            ]}
          />
          <hr className="my-4 border-rule" />
          <MessageText text={mail.body} />
        </Card>
      </div>
    </>
  );
}
