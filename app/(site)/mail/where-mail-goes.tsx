import { Notice } from "@/app/_components/notice";
import { mayMailLeave } from "@/lib/services/mail/read-mail";

/** Says whether messages leave this server, and what that means for the links in them. */
export function WhereMailGoes() {
  if (mayMailLeave()) {
    return (
      <Notice title="A mail server is set">
        Messages go out through it; once one is sent, its link is blotted out here, as the mailbox has it.
      </Notice>
    );
  }
  return (
    <Notice tone="caution" title="No mail server is set, so nothing leaves this server">
      <p>
        Messages stay here and can be read with the links in them, to be handed over in person. Whoever reads a link can
        choose that person's password: in production set <span className="font-mono">SMTP_URL</span>.
      </p>
    </Notice>
  );
}
