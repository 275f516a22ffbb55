const BROWSERS: [RegExp, string][] = [
  [/Edg\//, "Edge"],
  [/Firefox\//, "Firefox"],
  [/Chrome\//, "Chromium"],
  [/Safari\//, "Safari"],
];
const SYSTEMS: [RegExp, string][] = [
  [/Android/, "Android"],
  [/iPhone|iPad/, "iOS"],
  [/Windows/, "Windows"],
  [/Mac OS X/, "macOS"],
  [/Linux/, "Linux"],
];

const nameIn = (names: [RegExp, string][], text: string) => names.find(([pattern]) => pattern.test(text))?.[1];

/** A browser and its system in two words, as far as its own description tells. */
export function browserOf(userAgent: string): string {
  const [browser, system] = [nameIn(BROWSERS, userAgent), nameIn(SYSTEMS, userAgent)];
  if (!browser) return "A browser";
  return system ? `${browser} on ${system}` : browser;
}
