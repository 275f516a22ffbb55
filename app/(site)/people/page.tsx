import type { Metadata } from "next";
import { Card } from "@/app/_components/card";
import { Notice } from "@/app/_components/notice";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { holds, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { listPeople } from "@/lib/services/people/list-people";
import { AddPerson } from "./add-person";
import { PendingRoles } from "./pending-roles";
import { personState } from "./person-state";
import { RoleWarnings } from "./role-warnings";

export const metadata: Metadata = { title: "People" };

export default async function PeoplePage() {
  const ctx = await pageContext();
  const { items, next, warnings } = await listPeople(ctx, { limit: 1_000 });
  const isAdmin = holds(ctx, "admin");
  const oneTimeCode = await hasOneTimeCode(ctx);
  const rows = items.map((person) => ({
    ...person,
    state: personState(person),
    waiting: person.pending.map((one) => one.role),
  }));
  return (
    <>
      <TitleRow
        title="People"
        note="Who may do what; who approves is decided per object from who touched it"
        actions={isAdmin ? <AddPerson oneTimeCode={oneTimeCode} /> : undefined}
      />
      <div className="flex flex-col gap-[18px]">
        <RoleWarnings warnings={warnings} />
        {isAdmin ? <PendingRoles people={items} me={ctx.actor.id} oneTimeCode={oneTimeCode} /> : null}
        {next === null ? null : <Notice>The first 1,000 people are shown; the rest is in the list of the API.</Notice>}
        <Card>
          <DataTable
            name="people"
            rows={rows}
            rowKey="id"
            rowHref="/people/{id}"
            sort={{ key: "name", descending: false }}
            columns={[
              { key: "name", header: "Name" },
              { key: "email", header: "E-mail" },
              { key: "roles", header: "Roles" },
              { key: "waiting", header: "Waiting for", title: "Roles that a second admin has to confirm" },
              { key: "state", header: "State", format: { as: "state", kind: "person" } },
              {
                key: "signIn.oneTimeCode",
                header: "One-time code",
                format: { as: "yes-no", yes: "enrolled", no: "none" },
              },
              { key: "signIn.lastSeenAt", header: "Last seen", format: { as: "time" } },
              { key: "createdAt", header: "Added", format: { as: "date" }, hidden: true },
            ]}
            chips={[
              { id: "away", name: "Deactivated", key: "active", in: [false] },
              { id: "new", name: "No password yet", key: "state", in: ["waiting"] },
            ]}
            empty={{ title: "Nobody here" }}
          />
        </Card>
      </div>
    </>
  );
}
