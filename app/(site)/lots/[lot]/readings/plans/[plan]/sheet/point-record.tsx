import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { PlannedDevice, PlannedPoint } from "@/lib/domain/run-plan/run-plan";
import { plainFigure } from "../points-table";
import { WriteLine } from "./sheet-parts";

/** Columns to write signals into that fit beside place and serial on an upright sheet. */
const COLUMNS_MAX = 6;

/** Devices of a point that stay on one sheet with its heading. */
const KEPT_TOGETHER_MAX = 24;

const cell = "border border-rule px-1.5 py-1";

/** One temperature of the sheet: when it was reached, and a box for every reading of every device. */
export function PointRecord({ point, devices }: { point: PlannedPoint; devices: readonly PlannedDevice[] }) {
  const loads = [0, ...point.loadsKg];
  const repeats = Array.from({ length: point.repeats }, (_, index) => index + 1);
  const columns = repeats.flatMap((repeat) => loads.map((load) => ({ repeat, load })));
  const parts = [];
  for (let from = 0; from < columns.length; from += COLUMNS_MAX) parts.push(columns.slice(from, from + COLUMNS_MAX));
  return (
    <div className={`mt-6 ${devices.length <= KEPT_TOGETHER_MAX ? "break-inside-avoid" : ""}`}>
      <h2 className="flex flex-wrap items-baseline gap-x-3 border-b border-rule pb-1 text-sm font-[650]">
        Point {plainFigure(point.point)}: {plainFigure(point.setC)} °C
        <span className="text-xs font-normal text-ink-soft">
          {plainFigure(point.soakMin)} min of soak
          {point.loadsKg.length > 0 ? `, ${plainFigure(point.dwellS)} s under load` : ", unloaded"},{" "}
          {formatNumberOf(point.repeats, "repeat")}
        </span>
      </h2>
      <div className="my-2 grid grid-cols-2 gap-x-5 sm:grid-cols-4 print:grid-cols-4 break-inside-avoid break-after-avoid">
        <WriteLine label="Steady since" />
        <WriteLine label="Readings begun" />
        <WriteLine label="Reference then, °C" />
        <WriteLine label="Reference at the end, °C" />
      </div>
      {parts.map((part, index) => (
        <SignalTable
          key={`${part[0]?.repeat} ${part[0]?.load}`}
          columns={part}
          devices={devices}
          withTemperature={index === 0}
        />
      ))}
    </div>
  );
}

interface SignalTableProps {
  columns: readonly { repeat: number; load: number }[];
  devices: readonly PlannedDevice[];
  withTemperature: boolean;
}

function SignalTable({ columns, devices, withTemperature }: SignalTableProps) {
  return (
    <ScrollRegion label="Readings of this point" className="overflow-x-auto print:overflow-visible">
      <table className="mb-2 w-full min-w-[720px] table-fixed text-xs print:min-w-0">
        <thead>
          <tr className="text-left">
            <th scope="col" className={`${cell} w-[10%]`}>
              Place
            </th>
            <th scope="col" className={`${cell} w-[21%]`}>
              Serial
            </th>
            {withTemperature ? (
              <th scope="col" className={cell}>
                Device temp.
              </th>
            ) : null}
            {columns.map(({ repeat, load }) => (
              <th key={`${repeat} ${load}`} scope="col" className={`${cell} font-normal`}>
                <b>{load === 0 ? "0" : plainFigure(load)} kg</b>, {repeat}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {devices.map(({ serial, position }) => (
            <tr key={serial} className="h-7">
              <td className={`${cell} font-mono break-all`}>{position}</td>
              <td className={`${cell} font-mono break-all`}>{serial}</td>
              {withTemperature ? <td className={cell} /> : null}
              {columns.map(({ repeat, load }) => (
                <td key={`${repeat} ${load}`} className={cell} />
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </ScrollRegion>
  );
}
