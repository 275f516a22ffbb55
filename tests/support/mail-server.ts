/** A mail server on loopback that keeps what it is given: the world outside, as tests need it. */
import { once } from "node:events";
import type { AddressInfo } from "node:net";
import { type ParsedMail, simpleParser } from "mailparser";
import { SMTPServer } from "smtp-server";

export interface TestMailServer {
  /** For `SMTP_URL`. */
  url: string;
  received: ParsedMail[];
  /** Every message is refused with these words until it is set to undefined again. */
  refuseWith: string | undefined;
  close(): Promise<void>;
}

export async function openMailServer(): Promise<TestMailServer> {
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ["STARTTLS"],
    onData(stream, _session, done) {
      simpleParser(stream).then((mail) => {
        if (fake.refuseWith !== undefined) return done(new Error(fake.refuseWith));
        fake.received.push(mail);
        done();
      }, done);
    },
  });
  const fake: TestMailServer = {
    url: "",
    received: [],
    refuseWith: undefined,
    close: () => new Promise((resolve) => server.close(() => resolve())),
  };
  const listener = server.listen(0, "127.0.0.1");
  await once(listener, "listening");
  fake.url = `smtp://127.0.0.1:${(listener.address() as AddressInfo).port}`;
  return fake;
}
