import { StateMark } from "@/app/_components/state/state-mark";
import { type DataColumn, type FilterChip, type Row, textOf, valueAt } from "@/app/_components/table/column";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";

const NO_FREEDOM = "The fit passes through all points: no error can be stated";

/** A value with its standard error beside it, where a degree of freedom allows one. */
function withError(column: DataColumn, error: string): DataColumn {
  return {
    ...column,
    cell: (row) => {
      const text = textOf(column, row);
      const known = valueAt(row, error);
      if (typeof known !== "number") return <span title={text === "—" ? undefined : NO_FREEDOM}>{text}</span>;
      return (
        <>
          {text} <span className="text-xs text-ink-soft">±{textOf({ ...column, key: error }, row)}</span>
        </>
      );
    },
  };
}

function findingsCell(row: Row) {
  const findings = valueAt(row, "findings");
  if (!Array.isArray(findings) || findings.length === 0) return "";
  const worst = ["hard", "soft", "note"].find((severity) => findings.some((one) => one.severity === severity));
  const tone = worst === "hard" ? "bad" : worst === "soft" ? "caution" : "info";
  const title = findings.map((one) => one.message).join("\n");
  return <StateMark tone={tone} word={formatNumberOf(findings.length, "finding")} title={title} />;
}

export interface DeviceColumnsOptions {
  order: number;
  intervals: number;
  isPooled: boolean;
  /** An import has no readings: neither own values nor errors. */
  isImport: boolean;
}

/** Columns of the devices of a derivation; `errorV` is made from the span error by {@link withErrorV}. */
export function deviceColumns({ order, intervals, isPooled, isImport }: DeviceColumnsOptions): DataColumn[] {
  const measured: DataColumn[] = isImport
    ? []
    : [
        {
          key: "errorV",
          header: `error at ${formatCount(intervals)}`,
          unit: isPooled ? "v, pooled" : "v",
          title: "Worst span error of the device at capacity, in verification intervals",
          format: { as: "figure", digits: 2 },
        },
        {
          key: "spanErrorPpm",
          header: "span error",
          format: { as: "quantity", name: "spanErrorPpm", sign: "always" },
          hidden: true,
        },
        {
          key: "spanRatio",
          header: "span",
          title: "Share of the envelope; up to 1 is inside",
          format: { as: "quantity", name: "ratio" },
          hidden: true,
        },
        {
          key: "zeroShiftRatio",
          header: "zero shift",
          title: "Share of the limit; up to 1 is inside",
          format: { as: "quantity", name: "ratio" },
          hidden: true,
        },
      ];
  const own: DataColumn = {
    key: "individual.gainTc",
    header: "own gainTc",
    title: "The correction that the device's own loaded readings ask for",
    format: { as: "quantity", name: "gainTc" },
  };
  return [
    { key: "serial", header: "Serial", format: { as: "code" } },
    { key: "role", header: "Role" },
    ...(isImport ? [] : [isPooled ? own : withError(own, "uncertainty.gainTc")]),
    {
      key: "coefficients.gainTc",
      header: "gainTc",
      title: "The correction of gain, opposite in sign to the cell's own temperature effect",
      format: { as: "quantity", name: "gainTc" },
      hidden: !isImport,
    },
    withError(
      {
        key: "coefficients.zeroTc",
        header: "zeroTc",
        title: "The drift of zero itself",
        format: { as: "quantity", name: "zeroTc" },
      },
      "uncertainty.zeroTc",
    ),
    withError(
      { key: "coefficients.zero", header: "zero", format: { as: "quantity", name: "zero" } },
      "uncertainty.zero",
    ),
    withError(
      { key: "coefficients.gain", header: "gain", format: { as: "quantity", name: "gain" } },
      "uncertainty.gain",
    ),
    {
      key: "coefficients.gainTc2",
      header: "gainTc2",
      format: { as: "quantity", name: "gainTc2" },
      hidden: order === 1,
    },
    {
      key: "coefficients.zeroTc2",
      header: "zeroTc2",
      format: { as: "quantity", name: "zeroTc2" },
      hidden: order === 1,
    },
    {
      key: "coefficients.tempOffset",
      header: "tempOffset",
      format: { as: "quantity", name: "tempOffset" },
      hidden: true,
    },
    { key: "coefficients.tempSlope", header: "tempSlope", format: { as: "quantity", name: "tempSlope" }, hidden: true },
    {
      key: "uncertainty.residualSdZero",
      header: "zero residual",
      title: "Standard deviation of the residuals of zero; none without a degree of freedom",
      format: { as: "quantity", name: "zero" },
      hidden: true,
    },
    ...measured,
    { key: "findings.length", header: "Findings", align: "left", format: { as: "count" }, cell: findingsCell },
    { key: "state", header: "State", format: { as: "state", kind: "coefficient-set" } },
  ];
}

/** A row with its span error at capacity in intervals. */
export function withErrorV(row: Row, intervals: number): Row {
  const ppm = row.spanErrorPpm;
  return { ...row, errorV: typeof ppm === "number" ? (ppm * intervals) / 1e6 : null };
}

const ROLES = [
  { id: "sample", name: "Sample" },
  { id: "zero", name: "Zero-only" },
  { id: "verification", name: "Verification" },
  { id: "excluded", name: "Excluded" },
];
const STATES = ["proposed", "approved", "refused", "stale", "revoked"];

/** Chips for what there is: findings, roles, and states where they differ. */
export function deviceChips(counts: { roles: Record<string, number>; states: Record<string, number> }): FilterChip[] {
  const states = STATES.filter((state) => (counts.states[state] ?? 0) > 0);
  return [
    { id: "findings", name: "With findings", key: "findings.length", above: 0 },
    ...ROLES.filter(({ id }) => (counts.roles[id] ?? 0) > 0).map((role) => ({ ...role, key: "role", in: [role.id] })),
    ...(states.length > 1
      ? states.map((state) => ({
          id: state,
          name: `${state[0]?.toUpperCase()}${state.slice(1)}`,
          key: "state",
          in: [state],
        }))
      : []),
  ];
}
