"use client";

import { useQuery } from "@tanstack/react-query";
import { callApi } from "@/app/_components/api-client";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import type { NewestSet } from "@/schemas/api/coefficients";
import type { CoefficientName } from "@/schemas/documents/layout";
import { numberText } from "../table/write-member";
import type { GivenDevice } from "./encode-sample";

/** Whose values the sample has. */
export interface SampleOrigin {
  /** `invented`, `typed` or a lot's code behind `lot:`. */
  kind: string;
  serial: string;
  typed: Partial<Record<CoefficientName, string>>;
}

export const inventedSample: SampleOrigin = { kind: "invented", serial: "", typed: {} };

interface SampleChoiceProps {
  origin: SampleOrigin;
  lots: readonly string[];
  /** Coefficients that the layout stores. */
  names: readonly CoefficientName[];
  onChange: (origin: SampleOrigin) => void;
}

/** Chooses the sample device: an invented one, one of the family's lots, or typed values. */
export function SampleChoice({ origin, lots, names, onChange }: SampleChoiceProps) {
  const lot = lotOf(origin);
  const { data: sets = [], isFetching } = useLotSets(lot);
  const options = [
    { value: "invented", name: "An invented device" },
    { value: "typed", name: "Typed values" },
    ...lots.map((code) => ({ value: `lot:${code}`, name: `A device of ${code}` })),
  ];
  const serials = sets.map((set) => ({ value: set.serial, name: `${set.serial}, ${set.state}` }));
  return (
    <div className="mb-3 flex flex-col gap-3 print:hidden">
      <div className="grid gap-3 sm:grid-cols-2">
        <Select
          label="Sample"
          value={origin.kind}
          options={options}
          onChange={(event) => onChange({ ...origin, kind: event.currentTarget.value, serial: "" })}
        />
        {lot === undefined ? null : serials.length > 0 ? (
          <Select
            label="Device"
            value={origin.serial || serials[0]?.value}
            options={serials}
            onChange={(event) => onChange({ ...origin, serial: event.currentTarget.value })}
          />
        ) : (
          <p className="self-end pb-2 text-sm text-ink-soft" role="status">
            {isFetching ? "Its coefficients are on their way." : `${lot} has no coefficients yet.`}
          </p>
        )}
        {origin.kind === "typed" ? (
          <TextInput
            label="Serial"
            code
            value={origin.serial}
            onChange={(event) => onChange({ ...origin, serial: event.currentTarget.value })}
          />
        ) : null}
      </div>
      {origin.kind === "typed" ? (
        <div className="grid grid-cols-2 gap-3 sm:grid-cols-4">
          {names.map((name) => (
            <TextInput
              key={name}
              label={name}
              code
              inputMode="decimal"
              value={origin.typed[name] ?? ""}
              error={wrongNumber(origin.typed[name])}
              onChange={(event) =>
                onChange({ ...origin, typed: { ...origin.typed, [name]: event.currentTarget.value } })
              }
            />
          ))}
        </div>
      ) : null}
    </div>
  );
}

const wrongNumber = (text: string | undefined) =>
  text && numberText(text.trim()) === undefined ? "Takes a number." : undefined;

const lotOf = ({ kind }: SampleOrigin) => (kind.startsWith("lot:") ? kind.slice(4) : undefined);

/** The newest coefficients of a lot's first devices. */
function useLotSets(lot: string | undefined) {
  return useQuery({
    queryKey: ["sample", lot],
    enabled: lot !== undefined,
    staleTime: 60_000,
    queryFn: async ({ signal }) =>
      (await callApi<{ items: NewestSet[] }>(`/api/v1/lots/${lot}/coefficients?limit=500`, { signal })).items,
  });
}

/** The device that a choice stands for; what it does not say is invented. */
export function useGivenDevice(origin: SampleOrigin): GivenDevice {
  const lot = lotOf(origin);
  const { data: sets = [] } = useLotSets(lot);
  if (lot !== undefined) {
    const set = sets.find((one) => one.serial === origin.serial) ?? sets[0];
    return set ? { lot, serial: set.serial, coefficients: withoutNull(set.coefficients) } : { lot };
  }
  if (origin.kind !== "typed") return {};
  const typed = Object.entries(origin.typed).flatMap(([name, text]) => {
    const number = numberText(text.trim());
    return number === undefined ? [] : [[name, Number(number)]];
  });
  return { serial: origin.serial.trim(), coefficients: Object.fromEntries(typed) };
}

function withoutNull(values: object): GivenDevice["coefficients"] {
  return Object.fromEntries(Object.entries(values).filter(([, value]) => typeof value === "number"));
}
