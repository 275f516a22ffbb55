"use client";

import { ArrowDown, ArrowUp, Trash2 } from "lucide-react";
import { Fragment } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FieldError, inputLook } from "@/app/_components/form/field";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { type PointField, readPoint } from "@/lib/domain/run-plan/point-text";
import type { PlanPartProps } from "./devices-part";
import { FindingsHere, type ShownPlanFinding } from "./findings-here";
import type { DraftPoint } from "./plan-draft";

const COLUMNS: readonly { field: PointField; name: string; unit: string; width: string; title?: string }[] = [
  { field: "point", name: "Point", unit: "", width: "w-16", title: "Number that names it in the readings" },
  { field: "setC", name: "Set point", unit: "°C", width: "w-24" },
  { field: "soakMin", name: "Soak", unit: "min", width: "w-24", title: "Once the chamber stays within 0.5 K" },
  {
    field: "loads",
    name: "Loads",
    unit: "kg",
    width: "min-w-36",
    title: "Above the fixture's dead load, parted by blanks; unloaded is always read first",
  },
  {
    field: "dwellS",
    name: "Dwell",
    unit: "s",
    width: "w-24",
    title: "Under load before reading; the same at each temperature",
  },
  { field: "repeats", name: "Repeats", unit: "", width: "w-20" },
];

/** Temperatures in working order, each with soak, loads, dwell and repeats. */
export function PointsPart({ draft, change, findings }: PlanPartProps) {
  const { points } = draft;
  const about = findings.filter((finding) => finding.part === "points");
  const put = (index: number, part: Partial<DraftPoint>) =>
    change({ points: points.map((one, at) => (at === index ? { ...one, ...part } : one)) });
  const move = (index: number, by: number) => {
    const next = [...points];
    const [one] = next.splice(index, 1);
    if (one) next.splice(index + by, 0, one);
    change({ points: next });
  };
  const add = (like: DraftPoint | undefined) => {
    const numbers = points.map((one) => Number(one.point)).filter(Number.isInteger);
    const key = Math.max(0, ...points.map((one) => one.key)) + 1;
    const start = like ?? { setC: "", soakMin: "", loads: "", repeats: "1", dwellS: "0" };
    change({ points: [...points, { ...start, key, point: String(Math.max(0, ...numbers) + 1) }] });
  };
  return (
    <Card title="Temperatures and loads" note="In working order; unloaded is read first at each">
      <ScrollRegion label="Temperatures and loads" className="relative overflow-x-auto">
        <table className="w-full min-w-[640px] max-w-[920px]">
          <thead>
            <tr>
              {COLUMNS.map(({ field, name, unit, title }) => (
                <th
                  key={field}
                  scope="col"
                  title={title}
                  className="px-1.5 pb-1 text-left text-xs font-semibold text-ink-soft"
                >
                  {name}
                  {unit ? `, ${unit}` : ""}
                </th>
              ))}
              <th scope="col">
                <span className="sr-only">Order</span>
              </th>
            </tr>
          </thead>
          <tbody>
            {points.map((one, index) => (
              <PointRow
                key={one.key}
                point={one}
                onChange={(part) => put(index, part)}
                onMove={(by) => move(index, by)}
                onRemove={() => change({ points: points.filter((_, at) => at !== index) })}
                isFirst={index === 0}
                isLast={index === points.length - 1}
                findings={about.filter((finding) => String(finding.point) === one.point.trim())}
              />
            ))}
          </tbody>
        </table>
      </ScrollRegion>
      <div className="mt-3 flex flex-wrap gap-2.5">
        <Button onClick={() => add(points.at(-1))}>Add a temperature</Button>
        {about.some((finding) => finding.code === "plan.no_return") ? (
          <Button onClick={() => add(points[0])}>Return to the first temperature</Button>
        ) : null}
      </div>
      <div className="mt-3">
        <FindingsHere findings={about.filter((finding) => finding.point === null)} />
      </div>
    </Card>
  );
}

interface PointRowProps {
  point: DraftPoint;
  onChange: (part: Partial<DraftPoint>) => void;
  onMove: (by: number) => void;
  onRemove: () => void;
  isFirst: boolean;
  isLast: boolean;
  findings: readonly ShownPlanFinding[];
}

function PointRow({ point, onChange, onMove, onRemove, isFirst, isLast, findings }: PointRowProps) {
  const { wrong } = readPoint(point);
  const name = `point ${point.point || "without a number"}`;
  const arrow = "rounded p-1.5 text-ink-soft hover:text-ink disabled:opacity-40";
  return (
    <Fragment>
      <tr>
        {COLUMNS.map((column) => (
          <td key={column.field} className={`px-1.5 py-1 ${column.width}`}>
            <input
              aria-label={`${column.name}${column.unit ? ` in ${column.unit}` : ""} of ${name}`}
              aria-invalid={wrong[column.field] ? true : undefined}
              inputMode="decimal"
              autoComplete="off"
              value={point[column.field]}
              onChange={(event) => onChange({ [column.field]: event.currentTarget.value })}
              className={`${inputLook} h-9 px-2 font-mono`}
            />
          </td>
        ))}
        <td className="w-28 py-1 whitespace-nowrap">
          <button
            type="button"
            className={arrow}
            aria-label={`Move ${name} up`}
            disabled={isFirst}
            onClick={() => onMove(-1)}
          >
            <ArrowUp size={16} aria-hidden />
          </button>
          <button
            type="button"
            className={arrow}
            aria-label={`Move ${name} down`}
            disabled={isLast}
            onClick={() => onMove(1)}
          >
            <ArrowDown size={16} aria-hidden />
          </button>
          <button type="button" className={arrow} aria-label={`Remove ${name}`} onClick={onRemove}>
            <Trash2 size={16} aria-hidden />
          </button>
        </td>
      </tr>
      {findings.length > 0 || Object.keys(wrong).length > 0 ? (
        <tr>
          <td colSpan={COLUMNS.length + 1} className="px-1.5 pb-2">
            {COLUMNS.map(({ field, name: column }) =>
              wrong[field] ? (
                <FieldError key={field}>
                  {column}: {wrong[field]}
                </FieldError>
              ) : null,
            )}
            <FindingsHere findings={findings} />
          </td>
        </tr>
      ) : null}
    </Fragment>
  );
}
