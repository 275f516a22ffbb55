import type { Metadata } from "next";
import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { stateOf } from "@/app/_components/state/state-of";
import { DataTable } from "@/app/_components/table/data-table";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { getPerson, listRoleHistory } from "@/lib/services/people/list-people";
import { PendingRoles } from "../pending-roles";
import { personState } from "../person-state";
import { PersonActions } from "./person-actions";
import { PersonForm } from "./person-form";

export const metadata: Metadata = { title: "Person" };

export default async function PersonPage({ params }: { params: Promise<{ person: string }> }) {
  const ctx = await pageContext();
  const { person: id } = await params;
  const person = await orNotFound(getPerson(ctx, id));
  const history = await listRoleHistory(ctx, id);
  const oneTimeCode = await hasOneTimeCode(ctx);
  const isAdmin = holds(ctx, "admin");
  const isSelf = id === ctx.actor.id;
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "People", href: "/people" }, { name: person.name }]}
        title={person.name}
        state={stateOf("person", personState(person))}
        note={person.roles.join(", ") || "no role"}
        actions={isAdmin && !isSelf ? <PersonActions person={person} oneTimeCode={oneTimeCode} /> : undefined}
      />
      <div className="grid items-start gap-[18px] lg:grid-cols-[minmax(0,480px)_minmax(0,1fr)]">
        <Card title={isAdmin ? "Name and roles" : "Person"}>
          {isAdmin ? (
            <PersonForm person={person} isSelf={isSelf} oneTimeCode={oneTimeCode} />
          ) : (
            <Facts small facts={[{ label: "E-mail", value: person.email }]} />
          )}
        </Card>
        <div className="flex min-w-0 flex-col gap-[18px]">
          {isAdmin ? <PendingRoles people={[person]} me={ctx.actor.id} oneTimeCode={oneTimeCode} /> : null}
          {person.signIn ? (
            <Card title="Signing in">
              <Facts
                small
                facts={[
                  { label: "Password", value: person.signIn.passwordChosen ? "chosen" : "not yet" },
                  { label: "One-time code", value: person.signIn.oneTimeCode ? "enrolled" : "none" },
                  {
                    label: "Last seen",
                    value: person.signIn.lastSeenAt ? <TimeText at={person.signIn.lastSeenAt} /> : "never",
                  },
                  { label: "Added", value: <TimeText at={person.createdAt} date /> },
                ]}
              />
            </Card>
          ) : null}
          <Card title="Roles over time">
            <DataTable
              name="roles"
              rows={history}
              rowKey="id"
              columns={[
                { key: "role", header: "Role" },
                { key: "askedAt", header: "Asked", format: { as: "time" } },
                { key: "askedBy", header: "Asked by" },
                { key: "confirmedAt", header: "Held from", format: { as: "time" } },
                { key: "confirmedBy", header: "Confirmed by" },
                { key: "endedAt", header: "Ended", format: { as: "time" } },
                { key: "endedBy", header: "Ended by" },
              ]}
              empty={{ title: "No role yet", text: "An admin gives roles here; reviewer and admin take a second one." }}
            />
          </Card>
        </div>
      </div>
    </>
  );
}
