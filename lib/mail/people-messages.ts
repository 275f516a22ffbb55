/** Messages about people's own access: one function each. */
import { formatDateTime } from "@/lib/domain/format/time";
import { env } from "@/lib/env";
import { type Message, paragraphs } from "./message";

const page = (path: string) => `${env().origin}${path}`;

/** Address of the page on which a link's holder chooses a password. */
export function linkAddress(token: string): string {
  return page(`/welcome/${token}`);
}

export interface LinkFacts {
  name: string;
  token: string;
  expiresAt: Date;
}

/** To somebody new: choose a password and come in. */
export function welcomeMessage({ name, token, expiresAt, addedBy }: LinkFacts & { addedBy: string }): Message {
  return {
    template: "welcome",
    subject: "Choose your password for Trimwright",
    text: paragraphs(
      `Good day ${name},`,
      `${addedBy} added you to Trimwright. Open this address and choose a password; you sign in with it and this e-mail address.`,
      linkAddress(token),
      `It works once, until ${formatDateTime(expiresAt)}. If you did not expect this, leave it: without a password nobody can sign in.`,
    ),
  };
}

/** To somebody who lost the password or the one-time code, from an admin: a new password, and the code is taken away. */
export function newLinkMessage({ name, token, expiresAt, sentBy }: LinkFacts & { sentBy: string }): Message {
  return {
    template: "new-link",
    subject: "Choose a new password for Trimwright",
    text: paragraphs(
      `Good day ${name},`,
      `${sentBy} sent you a link to choose a new password. Using it ends your sessions and takes away your one-time code, if you have one; enrol it again afterwards.`,
      linkAddress(token),
      `It works once, until ${formatDateTime(expiresAt)}. If you did not ask for this, leave it and tell ${sentBy}.`,
    ),
  };
}

/** To somebody who asked for it themselves. */
export function resetMessage({ name, token, expiresAt }: LinkFacts): Message {
  return {
    template: "reset",
    subject: "Choose a new password for Trimwright",
    text: paragraphs(
      `Good day ${name},`,
      "Somebody asked for a link to choose a new password for this e-mail address. Using it ends your sessions.",
      linkAddress(token),
      `It works once, until ${formatDateTime(expiresAt)}. If it was not you, leave it: nothing changes.`,
    ),
  };
}

/** To the other admins: a role waits for one of them. */
export function roleToConfirmMessage(facts: { to: string; name: string; role: string; askedBy: string }): Message {
  const { to, name, role, askedBy } = facts;
  return {
    template: "role-to-confirm",
    subject: `Confirm the role ${role} of ${name}`,
    text: paragraphs(
      `Good day ${to},`,
      `${askedBy} asks that ${name} gets the role ${role}. It takes a second admin: look at it and confirm or refuse it here.`,
      page("/people"),
    ),
  };
}

/** To a person whose password was changed. */
export function passwordChangedMessage({ name }: { name: string }): Message {
  return {
    template: "password-changed",
    subject: "Your password for Trimwright was changed",
    text: paragraphs(
      `Good day ${name},`,
      "Your password was changed and your other sessions were ended. If it was not you, tell an admin now; they can end your sessions and send you a link.",
      page("/account"),
    ),
  };
}
