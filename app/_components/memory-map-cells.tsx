import { cellsOf, type MapCell, type MapPart, type MapRow } from "@/app/_components/memory-map-rows";
import { formatAddress } from "@/lib/domain/format/digest";

interface MapCellsProps {
  row: MapRow;
  hex: string | undefined;
  /** The part that is pointed at, here or elsewhere. */
  lit: MapPart | undefined;
  over: readonly (readonly [number, number])[];
  pageStart: boolean;
  /** The row has the map's one stop of Tab. */
  tabStop: boolean;
  onPoint: (part: MapPart | undefined) => void;
  onChoose: ((part: MapPart) => void) | undefined;
}

const tints = {
  identity: "bg-(--field-identity)",
  version: "bg-(--field-version)",
  temperature: "bg-(--field-temperature)",
  zero: "bg-(--field-zero)",
  gain: "bg-(--field-gain)",
  checksum: "bg-(--field-checksum)",
  other: "bg-sunk",
  kept: "bg-paper border-dashed",
} satisfies Record<MapPart["tint"], string>;

/** The cells of one row of the memory map. */
export function MapCells({ row, hex, lit, over, pageStart, tabStop, onPoint, onChoose }: MapCellsProps) {
  const cells = cellsOf(row);
  const stop = tabStop ? cells.findIndex((cell) => cell.part) : -1;
  return cells.map((cell, i) => {
    const covered = over.some(([from, to]) => cell.at <= to && cell.at + cell.length - 1 >= from);
    const outline = covered ? "outline-2 -outline-offset-1 outline-oxide" : "";
    if (!cell.part) {
      return (
        <td
          key={cell.at}
          colSpan={cell.length}
          className={`rounded-xs hatched ${row.empty ? "h-[22px]" : "h-10"} ${outline}`}
        >
          <span className="sr-only">unused</span>
        </td>
      );
    }
    const { part } = cell;
    const border = cell.overlap ? "border-2 border-oxide" : pageStart ? "border-t-2 border-t-ink-faint" : "";
    const isLit = lit !== undefined && lit.at === part.at && lit.name === part.name;
    return (
      <td
        key={`${cell.at}${part.name}`}
        data-part={part.path ?? part.name}
        colSpan={cell.length}
        title={`${part.name}, ${formatAddress(part.at)} to ${formatAddress(part.at + part.length - 1)}`}
        tabIndex={i === stop ? 0 : -1}
        onMouseEnter={() => onPoint(part)}
        onFocus={() => onPoint(part)}
        onBlur={() => onPoint(undefined)}
        onClick={() => onChoose?.(part)}
        onKeyDown={(event) => event.key === "Enter" && onChoose?.(part)}
        className={`h-10 overflow-hidden rounded-xs border border-ink/18 px-1.5 py-1 align-top leading-[1.2] ${tints[part.tint]} ${border} ${
          isLit ? "outline-2 outline-copper" : outline
        } ${onChoose ? "cursor-pointer" : ""}`}
      >
        <span className="block truncate">{cell.continued ? "…" : part.name}</span>
        <span className="block truncate font-mono text-ink-soft">{bytesText(cell, hex, part)}</span>
      </td>
    );
  });
}

function bytesText(cell: MapCell, hex: string | undefined, part: MapPart): string {
  if (cell.overlap) return "overlap";
  if (part.tint === "kept") return part.name;
  const bytes = hex?.slice(cell.at * 2, (cell.at + cell.length) * 2).match(/../g) ?? [];
  if (!part.isText) return bytes.join(" ").toUpperCase();
  return bytes
    .map((pair) => String.fromCharCode(Number.parseInt(pair, 16)))
    .join("")
    .replaceAll("\0", "");
}
