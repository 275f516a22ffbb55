import { LinkButton } from "@/app/_components/button";
import { MessagePage } from "@/app/_components/message-page";

export const metadata = { title: "Not found" };

export default function NotFound() {
  return (
    <MessagePage title="Nothing stands at this address">
      <p className="text-ink-soft">
        It may have been typed wrongly, or name a serial, lot or package that is not known here.
      </p>
      <p className="flex gap-2.5">
        <LinkButton href="/today" look="primary">
          Go to Today
        </LinkButton>
        <LinkButton href="/trace">Look up a serial</LinkButton>
      </p>
    </MessagePage>
  );
}
