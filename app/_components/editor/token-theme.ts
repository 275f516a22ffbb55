import * as core from "monaco-editor/editor";

export const themeName = "trimwright";

/** Defines the editor's theme from the tokens as they are now, light or dark, and returns its name. */
export function defineTokenTheme(): string {
  const probe = document.createElement("span");
  document.body.append(probe);
  const token = (name: string) => {
    probe.style.color = `var(--${name})`;
    return hexOf(getComputedStyle(probe).color);
  };
  const dark = luminance(token("paper")) < 0.5;
  const rule = (scope: string, name: string) => ({ token: scope, foreground: token(name).slice(1) });
  core.editor.defineTheme(themeName, {
    base: dark ? "vs-dark" : "vs",
    inherit: true,
    rules: [
      rule("", "ink"),
      rule("string.key.json", "slate-blue"),
      rule("string.value.json", "verdigris"),
      rule("number.json", "copper-strong"),
      rule("keyword.json", "copper-strong"),
      rule("delimiter", "ink-soft"),
    ],
    colors: {
      "editor.background": token("paper-raised"),
      "editor.foreground": token("ink"),
      "editorLineNumber.foreground": token("ink-faint"),
      "editorLineNumber.activeForeground": token("ink"),
      "editor.lineHighlightBackground": token("paper"),
      "editor.lineHighlightBorder": token("paper"),
      "editor.selectionBackground": token("tint"),
      "editor.inactiveSelectionBackground": token("tint"),
      "editorCursor.foreground": token("copper"),
      "editorIndentGuide.background1": token("rule"),
      "editorIndentGuide.activeBackground1": token("ink-faint"),
      "editorBracketMatch.border": token("copper"),
      "editorBracketMatch.background": token("tint"),
      "editorBracketHighlight.foreground1": token("ink"),
      "editorBracketHighlight.foreground2": token("ink"),
      "editorBracketHighlight.foreground3": token("ink"),
      "editorError.foreground": token("oxide"),
      "editorWarning.foreground": token("ochre"),
      "editorInfo.foreground": token("slate-blue"),
      "editorWidget.background": token("paper-raised"),
      "editorWidget.border": token("rule"),
      "editorHoverWidget.background": token("paper-raised"),
      "editorHoverWidget.border": token("rule"),
      "editorSuggestWidget.background": token("paper-raised"),
      "editorSuggestWidget.border": token("rule"),
      "quickInput.background": token("paper-raised"),
      "quickInput.foreground": token("ink"),
      "quickInputList.focusBackground": token("tint"),
      "quickInputList.focusForeground": token("ink"),
      "list.hoverBackground": token("paper"),
      "list.highlightForeground": token("copper"),
      "list.focusHighlightForeground": token("copper"),
      "editorSuggestWidget.selectedBackground": token("tint"),
      "editorSuggestWidget.selectedForeground": token("ink"),
      focusBorder: token("copper"),
    },
  });
  probe.remove();
  return themeName;
}

/** `rgb(r, g, b)` as #rrggbb. */
function hexOf(rgb: string): string {
  const parts = rgb.match(/[\d.]+/g)?.slice(0, 3) ?? [];
  return `#${parts.map((part) => Math.round(Number(part)).toString(16).padStart(2, "0")).join("")}`;
}

/** Rough lightness 0…1, enough to tell a dark page from a light one. */
function luminance(hex: string): number {
  return Number.parseInt(hex.slice(1, 3), 16) / 255;
}
