/** Hex in groups of eight digits, so that eye and voice keep their place. */
export function groupDigest(hex: string, size = 8): string[] {
  return hex.match(new RegExp(`.{1,${size}}`, "g")) ?? [];
}

/** An address or offset as upper-case hex of at least `width` digits: 003A. */
export function formatAddress(at: number, width = 4): string {
  return at.toString(16).toUpperCase().padStart(width, "0");
}

/** A byte as two upper-case hex digits. */
export function formatByte(byte: number): string {
  return formatAddress(byte, 2);
}
