import localFont from "next/font/local";

/*
 * Two faces for text and two for figures: the Latin file is preloaded, the extended one is fetched only where a name
 * needs it. Ranges as published with the font packages, written out at each
 * face because the font loader reads literals only.
 */
const textLatin = localFont({
  src: "../node_modules/@fontsource-variable/atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-wght-normal.woff2",
  variable: "--font-text-latin",
  weight: "200 800",
  display: "swap",
  adjustFontFallback: false,
});

const textLatinExt = localFont({
  src: "../node_modules/@fontsource-variable/atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-ext-wght-normal.woff2",
  variable: "--font-text-latin-ext",
  weight: "200 800",
  display: "swap",
  preload: false,
  adjustFontFallback: false,
  declarations: [
    {
      prop: "unicode-range",
      value:
        "U+0100-02BA,U+02BD-02C5,U+02C7-02CC,U+02CE-02D7,U+02DD-02FF,U+0304,U+0308,U+0329,U+1D00-1DBF,U+1E00-1E9F,U+1EF2-1EFF,U+2020,U+20A0-20AB,U+20AD-20C0,U+2113,U+2C60-2C7F,U+A720-A7FF",
    },
  ],
});

const figuresLatin = localFont({
  src: "../node_modules/@fontsource-variable/atkinson-hyperlegible-mono/files/atkinson-hyperlegible-mono-latin-wght-normal.woff2",
  variable: "--font-figures-latin",
  weight: "200 800",
  display: "swap",
  adjustFontFallback: false,
});

const figuresLatinExt = localFont({
  src: "../node_modules/@fontsource-variable/atkinson-hyperlegible-mono/files/atkinson-hyperlegible-mono-latin-ext-wght-normal.woff2",
  variable: "--font-figures-latin-ext",
  weight: "200 800",
  display: "swap",
  preload: false,
  adjustFontFallback: false,
  declarations: [
    {
      prop: "unicode-range",
      value:
        "U+0100-02BA,U+02BD-02C5,U+02C7-02CC,U+02CE-02D7,U+02DD-02FF,U+0304,U+0308,U+0329,U+1D00-1DBF,U+1E00-1E9F,U+1EF2-1EFF,U+2020,U+20A0-20AB,U+20AD-20C0,U+2113,U+2C60-2C7F,U+A720-A7FF",
    },
  ],
});

/** Class that declares the font variables; belongs on `html`. */
export const fontVariables = [textLatin, textLatinExt, figuresLatin, figuresLatinExt]
  .map((font) => font.variable)
  .join(" ");
