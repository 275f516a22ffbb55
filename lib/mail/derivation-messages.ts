/** Messages about coefficients that wait for a decision or got one: one function each. */
import { formatNumberOf } from "@/lib/domain/format/figure";
import { env } from "@/lib/env";
import { type Message, paragraphs } from "./message";

/** What a message says of a derivation or import. */
export interface ToldDerivation {
  /** Who gets it. */
  to: string;
  id: string;
  lot: string;
  devices: number;
}

const addressOf = ({ id }: ToldDerivation) => `${env().origin}/derivations/${id}`;

/** To the reviewers who had no hand in it: coefficients wait for one of them. */
export function coefficientsProposedMessage(facts: ToldDerivation & { by: string; toAcknowledge: number }): Message {
  const { to, lot, devices, by, toAcknowledge } = facts;
  const open =
    toAcknowledge > 0
      ? ` ${formatNumberOf(toAcknowledge, "finding needs", "findings need")} an acknowledgement with a reason.`
      : "";
  return {
    template: "coefficients-proposed",
    subject: `Coefficients of ${lot} wait for a decision`,
    text: paragraphs(
      `Good day ${to},`,
      `${by} proposes coefficients for ${formatNumberOf(devices, "device")} of lot ${lot}.${open} A reviewer who had no hand in them decides here.`,
      addressOf(facts),
    ),
  };
}

/** To those who made them: coefficients were refused, with the reason. */
export function coefficientsRefusedMessage(facts: ToldDerivation & { by: string; reason: string }): Message {
  const { to, lot, devices, by, reason } = facts;
  return {
    template: "coefficients-refused",
    subject: `Coefficients of ${lot} were refused`,
    text: paragraphs(
      `Good day ${to},`,
      `${by} refused the coefficients of ${formatNumberOf(devices, "device")} of lot ${lot}, for this reason:`,
      reason,
      "They will not be packed. Mend what the reason names, then derive anew.",
      addressOf(facts),
    ),
  };
}

/** To those who made them: an approval was taken back, with the reason. */
export function coefficientsRevokedMessage(facts: ToldDerivation & { by: string; reason: string }): Message {
  const { to, lot, devices, by, reason } = facts;
  return {
    template: "coefficients-revoked",
    subject: `The approval of coefficients of ${lot} was taken back`,
    text: paragraphs(
      `Good day ${to},`,
      `${by} revoked the approved coefficients of ${formatNumberOf(devices, "device")} of lot ${lot}, for this reason:`,
      reason,
      "They are never packed again. A package that is live stays live until it is withdrawn; look at what carries them.",
      addressOf(facts),
    ),
  };
}
