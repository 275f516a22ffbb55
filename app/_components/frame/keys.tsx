"use client";

import { useRouter } from "next/navigation";
import { useEffect, useMemo, useRef, useState } from "react";
import { Dialog } from "@/app/_components/dialog";
import { placesOf } from "@/app/_components/frame/places";
import { searchId } from "@/app/_components/frame/serial-search";

/** Event that opens the list of keys from elsewhere, as from the person's menu. */
export const showKeysEvent = "trimwright:show-keys";

const goWaitMs = 1_200;
/**
 * A wedge scanner leaves a few milliseconds between two characters, some cordless ones far more; people who type outside a field
 * leave more than this, and lose nothing if what they typed lands in the search.
 */
const scanGapMs = 120;
const scanStart = 4;

/** Keyboard of the whole frame: `/` searches, `g` and a letter goes, `?` lists the keys; a scan lands in the search. */
export function Keys({ roles }: { roles: readonly string[] }) {
  const places = useMemo(() => placesOf(roles), [roles]);
  const [open, setOpen] = useState(false);
  const router = useRouter();
  const goAt = useRef(0);
  const scan = useRef({ text: "", at: 0 });

  useEffect(() => {
    const show = () => setOpen(true);
    const onKey = (event: KeyboardEvent) => {
      if (event.ctrlKey || event.metaKey || event.altKey || event.defaultPrevented || isTyping(event.target)) return;
      if (document.querySelector('[role="dialog"], [role="alertdialog"], [role="menu"]')) return;
      const scanned = followScan(scan.current, event);
      if (scanned) {
        event.preventDefault();
        putInSearch(scanned);
        return;
      }
      const place = event.timeStamp - goAt.current < goWaitMs ? places.find((p) => p.key === event.key) : undefined;
      goAt.current = event.key === "g" ? event.timeStamp : 0;
      if (place) router.push(place.href);
      else if (event.key === "?") setOpen(true);
      else if (event.key === "/") putInSearch("");
      else return;
      event.preventDefault();
    };
    window.addEventListener("keydown", onKey);
    window.addEventListener(showKeysEvent, show);
    return () => {
      window.removeEventListener("keydown", onKey);
      window.removeEventListener(showKeysEvent, show);
    };
  }, [router, places]);

  return (
    <Dialog open={open} onOpenChange={setOpen} title="Keys">
      <dl className="grid grid-cols-[auto_1fr] items-center gap-x-4 gap-y-2">
        <KeyRow keys={["/"]} does="Search a serial, lot or package" />
        {places.map((place) => (
          <KeyRow key={place.href} keys={["g", place.key]} does={`Go to ${place.name}`} />
        ))}
        <KeyRow keys={["?"]} does="Show this list" />
        <KeyRow keys={["↑", "↓"]} does="Move through the rows of a table" />
        <KeyRow keys={["Enter"]} does="Open the row" />
        <KeyRow keys={["Space"]} does="Select the row, where rows can be selected" />
        <KeyRow keys={["Esc"]} does="Close a dialog or menu" />
      </dl>
    </Dialog>
  );
}

function KeyRow({ keys, does }: { keys: string[]; does: string }) {
  return (
    <>
      <dt className="flex gap-1">
        {keys.map((key) => (
          <kbd key={key} className="rounded border border-rule px-1.5 font-mono text-xs text-ink-soft">
            {key}
          </kbd>
        ))}
      </dt>
      <dd>{does}</dd>
    </>
  );
}

function isTyping(target: EventTarget | null): boolean {
  return (
    target instanceof HTMLElement && (target.isContentEditable || /^(INPUT|TEXTAREA|SELECT)$/.test(target.tagName))
  );
}

/** Collects characters that come as fast as only a scanner sends them; the text so far once it is sure, else "". */
function followScan(scan: { text: string; at: number }, event: KeyboardEvent): string {
  if (event.key.length !== 1) return "";
  scan.text = event.timeStamp - scan.at < scanGapMs ? scan.text + event.key : event.key;
  scan.at = event.timeStamp;
  return scan.text.length >= scanStart ? scan.text : "";
}

function putInSearch(text: string): void {
  const input = document.getElementById(searchId);
  if (!(input instanceof HTMLInputElement)) return;
  input.focus();
  if (text) input.value = text;
  else input.select();
}
