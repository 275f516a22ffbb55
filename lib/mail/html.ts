const ESCAPES: Record<string, string> = { "&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;" };
const escapeHtml = (text: string) => text.replace(/[&<>"]/g, (sign) => ESCAPES[sign] ?? sign);

/** The HTML of a message's text: paragraphs, and a link for an address on a line of its own. No images, nothing from outside. */
export function htmlOf(text: string): string {
  const body = text
    .trim()
    .split(/\n{2,}/)
    .map((part) => `<p>${/^https?:\/\/\S+$/.test(part) ? linkOf(part) : escapeHtml(part).replaceAll("\n", "<br>")}</p>`)
    .join("\n");
  return `<!doctype html>\n<html lang="en"><body style="font-family:sans-serif;line-height:1.45">\n${body}\n</body></html>\n`;
}

function linkOf(address: string): string {
  const escaped = escapeHtml(address);
  return `<a href="${escaped}">${escaped}</a>`;
}
