import type { Metadata } from "next";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { SignedOutFrame } from "@/app/_components/frame/signed-out-frame";
import { newContext } from "@/lib/http/route";
import { describeLink, type LinkView } from "@/lib/services/people/use-link";
import { ChoosePassword } from "./choose-password";

export const metadata: Metadata = { title: "Choose a password", robots: "noindex", referrer: "no-referrer" };

/** Where a mailed or printed link leads. Looking uses nothing up. */
export default async function WelcomePage({ params }: { params: Promise<{ token: string }> }) {
  const { token } = await params;
  const link = await describeLink(newContext({ kind: "public" }), token);
  return (
    <SignedOutFrame>
      {link.state === "open" ? (
        <Card>
          <h1 className="mb-1 text-lg">{link.firstAdmin ? "Set up the first admin" : "Choose a password"}</h1>
          <p className="mb-4 text-sm text-ink-soft">
            {link.firstAdmin
              ? "You look after people and roles. Name a second admin next: until they have chosen a password you give roles alone, afterwards reviewer and admin take two."
              : `For ${link.name}. You sign in with it and ${link.email}.`}
          </p>
          <ChoosePassword token={token} firstAdmin={link.firstAdmin} email={link.email} />
        </Card>
      ) : (
        <DeadLink state={link.state} />
      )}
    </SignedOutFrame>
  );
}

const words: Record<Exclude<LinkView["state"], "open">, { title: string; text: string }> = {
  used: {
    title: "This link was used",
    text: "Each link works once, and a newer one makes it useless. Sign in with the password you chose, or ask for another link.",
  },
  expired: { title: "This link has run out", text: "Ask for another one; an admin can send you one too." },
  unknown: { title: "There is no such link", text: "It may have been cut short: copy it whole from the message." },
};

function DeadLink({ state }: { state: Exclude<LinkView["state"], "open"> }) {
  const { title, text } = words[state];
  return (
    <Card>
      <h1 className="mb-1 text-lg">{title}</h1>
      <p className="text-ink-soft">{text}</p>
      <div className="mt-4 flex flex-wrap gap-2.5">
        <LinkButton href="/sign-in" look="primary">
          Sign in
        </LinkButton>
        <LinkButton href="/forgot">Ask for a link</LinkButton>
      </div>
    </Card>
  );
}
