/** Messages about packages that wait for a review or got one: one function each. */
import { formatNumberOf } from "@/lib/domain/format/figure";
import { env } from "@/lib/env";
import { type Message, paragraphs } from "./message";

/** What a message says of a package. */
export interface ToldPackage {
  /** Who gets it. */
  to: string;
  id: string;
  lot: string;
  version: string;
  /** Who did what the message tells of. */
  by: string;
}

const addressOf = ({ id }: ToldPackage, page = "") => `${env().origin}/packages/${id}${page}`;

/** To the reviewers who had no hand in it: a package waits for one of them. */
export function packageSubmittedMessage(facts: ToldPackage & { devices: number; waivers: number }): Message {
  const { to, lot, version, by, devices, waivers } = facts;
  const waived = waivers > 0 ? ` ${formatNumberOf(waivers, "warning was", "warnings were")} waived.` : "";
  return {
    template: "package-submitted",
    subject: `Package ${version} of ${lot} waits for review`,
    text: paragraphs(
      `Good day ${to},`,
      `${by} asks for the review of package ${version} of lot ${lot}, ${formatNumberOf(devices, "device")}.${waived} A reviewer who had no hand in it looks at its differences and decides here.`,
      addressOf(facts, "/review"),
    ),
  };
}

/** To who submitted it: the package was refused, with the reason. */
export function packageRefusedMessage(facts: ToldPackage & { reason: string }): Message {
  const { to, lot, version, by, reason } = facts;
  return {
    template: "package-refused",
    subject: `Package ${version} of ${lot} was refused`,
    text: paragraphs(
      `Good day ${to},`,
      `${by} refused package ${version} of lot ${lot}, for this reason:`,
      reason,
      "It stays as it is. Mend what the reason names, then build another.",
      addressOf(facts),
    ),
  };
}
