"use client";

import { useCallback, useEffect, useState } from "react";
import { readTheme, themeCookie } from "@/app/_components/theme";

const yearSeconds = 31_536_000;

/** The chosen theme ("system" where none is) and its setter, which keeps it in a cookie so that the server renders it. */
export function useTheme(): [string, (choice: string) => void] {
  const [choice, setChoice] = useState("system");
  useEffect(() => setChoice(readTheme(document.documentElement.dataset.theme) ?? "system"), []);

  const choose = useCallback((next: string) => {
    const theme = readTheme(next);
    if (theme) document.documentElement.dataset.theme = theme;
    else delete document.documentElement.dataset.theme;
    const age = theme ? yearSeconds : 0;
    // biome-ignore lint/suspicious/noDocumentCookie: the Cookie Store API is missing in Firefox
    document.cookie = `${themeCookie}=${theme ?? ""}; path=/; max-age=${age}; samesite=lax`;
    setChoice(next);
  }, []);
  return [choice, choose];
}
