import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";
import { TitleRow } from "@/app/_components/title-row";

/** What others than admins see here: messages carry links that choose a password. */
export function AdminsOnly() {
  return (
    <>
      <TitleRow title="Mail" />
      <Card>
        <EmptyState title="Mail is for admins" action={<LinkButton href="/today">Go to Today</LinkButton>}>
          Messages may carry links with which somebody chooses a password.
        </EmptyState>
      </Card>
    </>
  );
}
