"use client";

import { useState } from "react";
import { NumberInput } from "@/app/_components/form/number-input";
import { TextArea } from "@/app/_components/form/text-area";
import { TextInput } from "@/app/_components/form/text-input";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { numberSerials, readSerials } from "@/lib/domain/serials";
import { AppError } from "@/lib/errors";

/** Serials as they will be added, and what was left out of what was typed. */
export interface SerialsGiven {
  serials: string[];
  hint: string;
}

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
