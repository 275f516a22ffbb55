import type { Metadata } from "next";
import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { holds, pageContext } from "@/lib/http/page-context";
import { AdminsOnly } from "./admins-only";
import { WhereMailGoes } from "./where-mail-goes";

export const metadata: Metadata = { title: "Mail" };

export default async function MailPage() {
  const ctx = await pageContext();
  if (!holds(ctx, "admin")) return <AdminsOnly />;
  return (
    <>
      <TitleRow title="Mail" note="What was sent, or would have been; kept for 90 days" />
      <div className="flex flex-col gap-[18px]">
        <WhereMailGoes />
        <Card>
          <DataTable
            name="messages"
            endpoint="/api/v1/mail"
            rowKey="id"
            rowHref="/mail/{id}"
            columns={[
              { key: "subject", header: "Message" },
              { key: "to", header: "To" },
              { key: "state", header: "State", format: { as: "state", kind: "mail" } },
              { key: "createdAt", header: "Queued", format: { as: "time" } },
              { key: "sentAt", header: "Sent", format: { as: "time" } },
              { key: "attempts", header: "Attempts", format: { as: "count" }, hidden: true },
              { key: "lastError", header: "Last error", hidden: true },
            ]}
            chips={[
              { id: "failed", name: "Failed", key: "state", in: ["failed"] },
              { id: "kept", name: "Kept here", key: "state", in: ["kept"] },
            ]}
            empty={{
              title: "No message yet",
              text: "Adding a person, asking for a role and forgotten passwords send mail.",
            }}
          />
        </Card>
      </div>
    </>
  );
}
