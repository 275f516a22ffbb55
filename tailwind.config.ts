import type { Config } from "tailwindcss";

/** Colours, type scale and radii are the tokens of app/tokens.css; nothing else may name a colour. */
const config: Config = {
  content: ["./app/**/*.{ts,tsx}"],
  darkMode: ["selector", '[data-theme="dark"]'],
  theme: {
    extend: {
      colors: {
        paper: "var(--paper)",
        raised: "var(--paper-raised)",
        sunk: "var(--paper-sunk)",
        ink: "var(--ink)",
        "ink-soft": "var(--ink-soft)",
        "ink-faint": "var(--ink-faint)",
        rule: "var(--rule)",
        copper: "var(--copper)",
        "copper-strong": "var(--copper-strong)",
        "on-copper": "var(--on-copper)",
        tint: "var(--tint)",
        verdigris: "var(--verdigris)",
        ochre: "var(--ochre)",
        oxide: "var(--oxide)",
        slate: "var(--slate-blue)",
      },
      fontFamily: { sans: ["var(--font-text)", "system-ui", "sans-serif"], mono: ["var(--font-figures)", "monospace"] },
      fontSize: { xs: "13px", sm: "14px", base: "15px", md: "18px", lg: "22px", xl: "30px" },
      borderRadius: { DEFAULT: "3px" },
    },
  },
};

export default config;
