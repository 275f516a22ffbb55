import Form from "next/form";
import { Button } from "@/app/_components/button";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import type { ImpactKind } from "@/lib/services/trace/survey-impact";

export interface SourceFormProps {
  kind: ImpactKind;
  name: string;
  choices: readonly { value: string; name: string }[];
  value: string;
  /** Days as `YYYY-MM-DD`; of equipment only. */
  from: string;
  to: string;
}

/** Which one is asked about. Goes into the address, so that the answer can be linked. */
export function SourceForm({ kind, name, choices, value, from, to }: SourceFormProps) {
  const known = value === "" || choices.some((choice) => choice.value === value);
  const options = known ? choices : [{ value, name: `${value}, an older one` }, ...choices];
  return (
    <Form action="/trace/impact" className="flex flex-wrap items-end gap-x-4 gap-y-3">
      <div className="min-w-0 flex-1 basis-[320px]">
        <Select
          label={name}
          name={kind}
          required
          defaultValue={value}
          placeholder={choices.length === 0 ? "There is none yet" : "Choose"}
          options={options}
        />
      </div>
      {kind === "equipment" ? (
        <>
          <TextInput label="Readings from" name="from" type="date" defaultValue={from} />
          <TextInput label="To" name="to" type="date" defaultValue={to} />
        </>
      ) : null}
      <Button type="submit" look="primary">
        Show what it reached
      </Button>
    </Form>
  );
}
