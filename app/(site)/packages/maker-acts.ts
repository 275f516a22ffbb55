const words: Record<string, string> = {
  uploaded: "uploaded readings",
  derived: "derived coefficients",
  excluded: "left devices out",
  imported: "imported coefficients",
  built: "built it",
  submitted: "asked for review",
  "builds it": "builds it",
};

/** What somebody did for a package, in words that follow a name. */
export function actWords(act: string): string {
  return words[act] ?? act;
}
