import { applyEdits, JsonEditor } from "@/lib/domain/json-edits";

/** One place at which two texts of a draft differ. */
export interface DraftDifference {
  key: string;
  /** In words: “zero”, scale. */
  where: string;
  /** JSON as one line; null where that text has no such thing. */
  mine: string | null;
  theirs: string | null;
  /** What the common beginning says of it: only one of the two changed it, or both did. */
  changedBy: "me" | "them" | "both";
  /** Changes my text to theirs at this place. */
  take: (text: string) => string;
}

type Loose = Record<string, unknown>;
const LISTS = ["fields", "checksums"] as const;

/**
 * Differences of two texts of one draft, member by member; parts are told apart by their names.
 * @param base what both began with; null where that is not known, and then both count as having changed.
 * @returns null where one of the two is no layout to compare.
 */
export function compareDrafts(base: string | null, mine: string, theirs: string): DraftDifference[] | null {
  const [old, my, their] = [base === null ? null : readDraft(base), readDraft(mine), readDraft(theirs)];
  if (!my || !their) return null;
  const same = (a: unknown, b: unknown) => JSON.stringify(a) === JSON.stringify(b);
  const differences: DraftDifference[] = [];
  const note = (key: string, where: string, find: (draft: Loose) => unknown, take: DraftDifference["take"]) => {
    const [a, b] = [find(my), find(their)];
    if (same(a, b)) return;
    const before = old ? find(old) : undefined;
    const changedBy = !old ? "both" : same(before, a) ? "them" : same(before, b) ? "me" : "both";
    differences.push({ key, where, mine: shown(a), theirs: shown(b), changedBy, take });
  };
  for (const name of namesOf(my, their).filter((one) => one !== "memory" && !LISTS.includes(one as never))) {
    note(name, name, (draft) => draft[name], setter("", name, their[name]));
  }
  for (const name of namesOf(objectOf(my.memory), objectOf(their.memory))) {
    const find = (draft: Loose) => objectOf(draft.memory)[name];
    note(`memory/${name}`, `memory, ${name}`, find, setter("/memory", name, find(their)));
  }
  for (const list of LISTS) noteParts(list, my, their, note);
  return differences;
}

type Note = (key: string, where: string, find: (draft: Loose) => unknown, take: DraftDifference["take"]) => void;

function noteParts(list: (typeof LISTS)[number], my: Loose, their: Loose, note: Note): void {
  const [mine, theirs] = [partsOf(my, list), partsOf(their, list)];
  const find = (draft: Loose, name: string) => partsOf(draft, list).find((part) => part.name === name);
  for (const name of [...new Set([...mine, ...theirs].map((part) => String(part.name)))]) {
    const [a, b] = [find(my, name), find(their, name)];
    if (a && b) {
      for (const member of namesOf(a, b)) {
        const take = (text: string) => setter(pointerOf(text, list, name), member, b[member])(text);
        note(`${list}/${name}/${member}`, `“${name}”, ${member}`, (draft) => find(draft, name)?.[member], take);
      }
    } else {
      const take = (text: string) => (b ? inserted(text, list, theirs, b) : removed(text, list, name));
      note(`${list}/${name}`, `“${name}”`, (draft) => find(draft, name), take);
    }
  }
}

/** The texts put together: mine, with theirs at the chosen places. */
export function mergeDrafts(
  mine: string,
  differences: readonly DraftDifference[],
  theirs: ReadonlySet<string>,
): string {
  return differences.filter(({ key }) => theirs.has(key)).reduce((text, one) => one.take(text), mine);
}

const setter = (path: string, name: string, value: unknown) => (text: string) =>
  applyEdits(text, new JsonEditor(text).set(path, name, value === undefined ? undefined : JSON.stringify(value)));

function inserted(text: string, list: string, theirs: readonly Loose[], part: Loose): string {
  const before = theirs[theirs.indexOf(part) - 1];
  const draft = readDraft(text);
  const at = draft && before ? partsOf(draft, list).findIndex((one) => one.name === before.name) + 1 : 0;
  return applyEdits(text, new JsonEditor(text).insert(`/${list}`, part, at > 0 ? at : undefined));
}

function removed(text: string, list: string, name: string): string {
  return applyEdits(text, new JsonEditor(text).remove(pointerOf(text, list, name)));
}

function pointerOf(text: string, list: string, name: string): string {
  const draft = readDraft(text);
  return `/${list}/${draft ? partsOf(draft, list).findIndex((part) => part.name === name) : -1}`;
}

function readDraft(text: string): Loose | null {
  try {
    const value: unknown = JSON.parse(text);
    return typeof value === "object" && value !== null && !Array.isArray(value) ? (value as Loose) : null;
  } catch {
    return null; // half-written: only the texts as a whole can be chosen between
  }
}

const objectOf = (value: unknown): Loose => (typeof value === "object" && value !== null ? (value as Loose) : {});

function partsOf(draft: Loose, list: string): Loose[] {
  const parts = draft[list];
  return Array.isArray(parts) ? parts.filter((part) => typeof part === "object" && part !== null) : [];
}

const namesOf = (a: Loose, b: Loose) => [...new Set([...Object.keys(a), ...Object.keys(b)])];

const shown = (value: unknown) => (value === undefined ? null : JSON.stringify(value));
