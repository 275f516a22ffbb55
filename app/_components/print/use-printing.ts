"use client";

import { useSyncExternalStore } from "react";
import { flushSync } from "react-dom";

const watchers = new Set<() => void>();
let began = false;
let printing = false;
let focused: HTMLElement | null = null;

/**
 * Whether the page is being laid out for print. It turns true before the browser lays the pages out, and what is drawn for it is
 * in the document by then; a screen reader's place and the focus are where they were when it turns false again.
 */
export function usePrinting(): boolean {
  return useSyncExternalStore(
    watch,
    () => printing,
    () => false,
  );
}

function watch(onChange: () => void): () => void {
  if (watchers.size === 0) listen("addEventListener");
  watchers.add(onChange);
  return () => {
    watchers.delete(onChange);
    if (watchers.size === 0) listen("removeEventListener");
  };
}

function listen(how: "addEventListener" | "removeEventListener"): void {
  window[how]("beforeprint", begin);
  window[how]("afterprint", end);
  // Also without a dialog: developer tools and programs show the print's media by itself.
  window.matchMedia("print")[how]("change", tell);
}

function begin(): void {
  began = true;
  tell();
}

function end(): void {
  began = false;
  tell();
}

function tell(): void {
  const now = began || window.matchMedia("print").matches;
  if (now === printing) return;
  printing = now;
  if (now) focused = document.activeElement instanceof HTMLElement ? document.activeElement : null;
  // At once: the browser does not wait for a later rendering.
  flushSync(() => {
    for (const watcher of watchers) watcher();
  });
  // What is hidden on paper lost the focus.
  if (!now && document.activeElement === document.body) focused?.focus({ preventScroll: true });
}
