"use client";

import { useState } from "react";
import { FileDrop } from "@/app/_components/file-drop";
import { NumberInput } from "@/app/_components/form/number-input";
import { TextArea } from "@/app/_components/form/text-area";
import { TextInput } from "@/app/_components/form/text-input";
import type { GivenDevice } from "@/lib/domain/batches";
import { readDeviceTable } from "@/lib/domain/device-table";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { numberSerials, readSerials } from "@/lib/domain/serials";
import { AppError } from "@/lib/errors";

/** Serials as they will be added, and what was left out of what was typed. */
export interface SerialsGiven {
  serials: string[];
  /** With batches, where they were given. */
  devices?: GivenDevice[];
  hint: string;
}

/** Lines of 60,000 devices with both batches. */
const FILE_MAX_BYTES = 8 * 1024 * 1024;

type OnGiven = (given: SerialsGiven) => void;

/** A list typed, pasted or scanned, one serial a line. */
export function PasteSerials({ onGiven }: { onGiven: OnGiven }) {
  const read = (text: string) => {
    const { serials, refused, repeated } = readSerials(text);
    const [first] = refused;
    const hints = [
      first
        ? `${formatNumberOf(refused.length, "entry", "entries")} can't be a serial, first “${first.text}” in line ${first.line}: mend or remove it.`
        : "",
      repeated > 0 ? `${formatNumberOf(repeated, "serial")} stood there twice and counts once.` : "",
    ];
    onGiven({ serials: first ? [] : serials, hint: hints.filter(Boolean).join(" ") });
  };
  return (
    <TextArea
      label="Serials"
      code
      rows={6}
      onChange={(event) => read(event.target.value)}
      help="One a line, or parted by spaces, commas or tabs; a column of a table can be pasted as it is."
    />
  );
}

/** Lines of serial, gauge batch and material batch, pasted or from a file. */
export function TableSerials({ onGiven }: { onGiven: OnGiven }) {
  const [text, setText] = useState("");
  const read = (next: string) => {
    setText(next);
    const { devices, refused } = readDeviceTable(next);
    const [first] = refused;
    const hint = first
      ? `${formatNumberOf(refused.length, "line")} can't be taken: line ${first.line} ${first.why}. Mend or remove it.`
      : "";
    onGiven({ serials: first ? [] : devices.map((device) => device.serial), devices, hint });
  };
  return (
    <div className="flex flex-col gap-4">
      <FileDrop
        label="Choose a CSV"
        accept=".csv,.txt"
        maxBytes={FILE_MAX_BYTES}
        onFile={(file) => void file.text().then(read)}
        help="Columns serial, gauge_batch, material_batch; a batch may be empty. UTF-8."
      />
      <TextArea
        label="Or paste the lines"
        code
        rows={6}
        value={text}
        onChange={(event) => read(event.target.value)}
        help="serial,gauge_batch,material_batch, one device a line; a spreadsheet's columns can be pasted as they are. Known serials get their batches too."
      />
    </div>
  );
}

/** A prefix and a running number. */
export function RuleSerials({ lot, onGiven }: { lot: string; onGiven: OnGiven }) {
  const [rule, setRule] = useState({ prefix: `${lot}-`, from: "1", count: "", digits: "5" });
  const [wrong, setWrong] = useState<{ field: string; message: string }>();

  const change = (part: Partial<typeof rule>) => {
    const next = { ...rule, ...part };
    setRule(next);
    setWrong(undefined);
    if (next.count.trim() === "") return onGiven({ serials: [], hint: "" });
    try {
      const [from, count, digits] = [next.from, next.count, next.digits].map((text) =>
        text.trim() === "" ? Number.NaN : Number(text),
      );
      const serials = numberSerials({
        prefix: next.prefix,
        from: from as number,
        count: count as number,
        digits: digits as number,
      });
      onGiven({ serials, hint: "" });
    } catch (error) {
      if (!(error instanceof AppError)) throw error;
      setWrong({ field: String(error.details.field), message: error.message });
      onGiven({ serials: [], hint: "" });
    }
  };
  const field = (name: keyof typeof rule) => ({
    value: rule[name],
    onChange: (event: { target: { value: string } }) => change({ [name]: event.target.value }),
    error: wrong?.field === name ? wrong.message : undefined,
  });

  return (
    <div className="grid gap-4 sm:grid-cols-2 lg:grid-cols-4">
      <TextInput label="Prefix" code {...field("prefix")} help="What every serial begins with." />
      <NumberInput label="First number" {...field("from")} />
      <NumberInput label="How many" {...field("count")} help="At most 60,000 a lot." />
      <NumberInput label="Digits" {...field("digits")} help="Zeros in front make up to this many." />
    </div>
  );
}
