/** A message's text as its reader gets it: paragraphs, and a link for an address on a line of its own. */
export function MessageText({ text }: { text: string }) {
  const parts = text.trim().split(/\n{2,}/);
  return (
    <div className="flex max-w-[72ch] flex-col gap-3">
      {parts.map((part) => (
        <p key={part} className="break-words whitespace-pre-line">
          {/^https?:\/\/[^\s…]+$/.test(part) ? (
            <a href={part} className="font-mono text-sm break-all">
              {part}
            </a>
          ) : (
            part
          )}
        </p>
      ))}
    </div>
  );
}
