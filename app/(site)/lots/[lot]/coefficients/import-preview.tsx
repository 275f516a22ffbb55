import { FindingsList } from "@/app/_components/findings-list";
import { Notice } from "@/app/_components/notice";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import type { ImportPreview as Preview } from "@/schemas/api/coefficients";

/** Units and meaning of the columns that a file of coefficients may have. */
const UNITS: Record<string, string> = {
  tempOffset: "°C",
  tempSlope: "°C/unit",
  zero: "mV/V",
  zeroTc: "mV/V/K, drift",
  zeroTc2: "mV/V/K², drift",
  gain: "1",
  gainTc: "1/K, correction",
  gainTc2: "1/K², correction",
};

type Errors = Preview["errors"];

/** A file of coefficients as it was read, its errors at their cells, and what would be found; nothing is stored. */
export function ImportPreview({ preview }: { preview: Preview }) {
  const { errors, errorCount, rows, rowCount, columns } = preview;
  const known = new Set(columns);
  const general = errors.filter(({ column, row }) => row === 1 || !known.has(column));
  return (
    <section aria-label="Preview of the import" className="flex flex-col gap-3">
      <h3 className="font-semibold">Preview, nothing is stored</h3>
      {errorCount > 0 ? (
        <Notice tone="bad" title={`${formatNumberOf(errorCount, "error")} in the file`}>
          Mend them in the file and choose it again; as long as one is left nothing can be imported.
          {general.length > 0 ? (
            <ul className="mt-1 list-disc pl-5">
              {general.map((error, index) => (
                // biome-ignore lint/suspicious/noArrayIndexKey: the list never changes
                <li key={index}>
                  Row {error.row}
                  {error.column ? `, ${error.column}` : ""}: {error.message}
                </li>
              ))}
            </ul>
          ) : null}
        </Notice>
      ) : (
        <p className="text-sm">
          {formatNumberOf(preview.devices, "device")}, order {preview.order}: can be imported and proposed.
        </p>
      )}
      {columns.length > 0 ? <Rows preview={preview} /> : null}
      <p className="text-xs text-ink-soft">
        {rows.length < rowCount
          ? `${formatCount(rows.length)} of ${formatCount(rowCount)} rows: the first, and those with an error. `
          : ""}
        gainTc is the correction of gain, opposite in sign to the cell's own effect; zeroTc is the drift of zero itself.
      </p>
      {errorCount === 0 ? (
        <div>
          <h4 className="mb-1 font-semibold">Findings</h4>
          <FindingsList findings={preview.findings} empty="No findings." />
        </div>
      ) : null}
    </section>
  );
}

function Rows({ preview: { columns, rows, errors } }: { preview: Preview }) {
  const at = new Map<string, Errors>();
  for (const error of errors) {
    const key = `${error.row} ${error.column}`;
    at.set(key, [...(at.get(key) ?? []), error]);
  }
  return (
    <ScrollRegion label="Rows of the file" className="max-h-96 overflow-auto border border-rule">
      <table className="w-full text-sm">
        <thead>
          <tr>
            <th scope="col" className={`${head} text-right`}>
              Row
            </th>
            {columns.map((column, index) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: a file may name a column twice
              <th key={index} scope="col" className={`${head} ${column === "serial" ? "text-left" : "text-right"}`}>
                {column.slice(0, 64)}
                <span className="block font-normal">{UNITS[column] ?? ""}</span>
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.map(({ row, cells }) => (
            <tr key={row} className="border-b border-rule/55 align-top">
              <td className="px-3 py-1 text-right font-mono text-ink-soft">{row}</td>
              {cells.map((cell, index) => (
                <Cell
                  // biome-ignore lint/suspicious/noArrayIndexKey: cells have no other identity
                  key={index}
                  text={cell}
                  isSerial={columns[index] === "serial"}
                  errors={at.get(`${row} ${columns[index] ?? ""}`) ?? []}
                />
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </ScrollRegion>
  );
}

const head =
  "sticky top-0 border-b border-rule bg-raised px-3 py-1.5 text-xs font-semibold text-ink-soft whitespace-nowrap";

function Cell({ text, isSerial, errors }: { text: string; isSerial: boolean; errors: Errors }) {
  const isWrong = errors.length > 0;
  return (
    <td
      className={`px-3 py-1 font-mono ${isSerial ? "" : "text-right"} ${isWrong ? "outline-1 -outline-offset-1 outline-oxide" : ""}`}
    >
      <span className={isWrong ? "font-semibold text-oxide" : ""}>{text.slice(0, 80) || (isWrong ? "empty" : "")}</span>
      {errors.map(({ code, message }) => (
        <span key={code} className="block min-w-[10rem] font-sans text-xs text-oxide">
          {message}
        </span>
      ))}
    </td>
  );
}
