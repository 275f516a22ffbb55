/** A message as it is queued: plain text, from which the HTML of the same words is made when it is sent. */
export interface Message {
  /** Name of what it says, as `role-to-confirm`; shown on the mail page. */
  template: string;
  subject: string;
  /** Paragraphs are parted by a blank line; an address on a line of its own becomes a link. */
  text: string;
}

/** Paragraphs to a message's text. */
export function paragraphs(...parts: readonly string[]): string {
  return `${parts.join("\n\n")}\n`;
}
