/** What of a column's width on paper is known from its texts. */
export interface ColumnTexts {
  /** Set in the face of figures, and kept in one piece. */
  mono: boolean;
  /** Characters of the longest text. */
  longest: number;
  /** Characters of the longest word of any text. */
  word: number;
  /** Characters of the longest word of the heading. */
  heading: number;
}

/** Advances of the two faces at a font size of 1, the text's an average of its lower case, rounded up. */
const MONO = 0.63;
const TEXT = 0.55;
/** Texts wrap from about here on; a column of single words is not spread out more than they need. */
const WRAP = 18;
const PADDING = 1;

/**
 * Width that a table takes without breaking a figure or a word, as a multiple of its font size, so that the size can be
 * chosen for the paper.
 */
export function paperWidth(columns: readonly ColumnTexts[]): number {
  return columns.reduce((sum, column) => sum + columnWidth(column), 0);
}

function columnWidth({ mono, longest, word, heading }: ColumnTexts): number {
  const text = mono ? longest * MONO : Math.max(word, Math.min(longest, WRAP)) * TEXT;
  return Math.max(text, heading * TEXT) + PADDING;
}

/** Characters of the longest word. */
export function longestWord(text: string): number {
  return text.split(/\s+/).reduce((most, word) => Math.max(most, word.length), 0);
}
