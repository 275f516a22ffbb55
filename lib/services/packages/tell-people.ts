import type { Trx } from "@/db/executor";
import { findMailedPerson, listDeciders } from "@/db/queries/mailed-people";
import type { PackageRow } from "@/db/queries/packages";
import { packageRefusedMessage, packageSubmittedMessage } from "@/lib/mail/package-messages";
import type { PersonCtx } from "@/lib/services/context";
import { queueMail } from "@/lib/services/mail/queue-mail";
import { countsOf } from "./package-counts";

/** Tells the reviewers who may decide that a package waits for one of them. */
export async function tellPackageDeciders(ctx: PersonCtx, trx: Trx, pkg: PackageRow, waivers: number): Promise<void> {
  const { id, lotCode: lot, version } = pkg;
  const { devices } = countsOf(pkg);
  for (const person of await listDeciders(trx, "package", id)) {
    const facts = { to: person.name, id, lot, version, by: ctx.actor.name, devices, waivers };
    await queueMail(ctx, trx, person, packageSubmittedMessage(facts));
  }
}

/** Tells who submitted a package that it was refused, with the reason. */
export async function tellSubmitter(ctx: PersonCtx, trx: Trx, pkg: PackageRow, reason: string): Promise<void> {
  if (pkg.submittedBy === null) return;
  const person = await findMailedPerson(trx, pkg.submittedBy);
  if (!person) return;
  const { id, lotCode: lot, version } = pkg;
  const message = packageRefusedMessage({ to: person.name, id, lot, version, by: ctx.actor.name, reason });
  await queueMail(ctx, trx, person, message);
}
