/** Where a table's focus is. */
export interface GridPlace {
  row: number;
  column: number;
}

/** What a key asks for on a cell that is not being written in. */
export type GridDeed =
  | { do: "go"; to: GridPlace }
  | { do: "write"; entry?: string }
  | { do: "clear" | "remove" | "add" | "undo" | "redo" }
  | { do: "move"; by: -1 | 1 };

interface Key {
  key: string;
  ctrlKey: boolean;
  metaKey: boolean;
  altKey: boolean;
  shiftKey: boolean;
}

const arrows: Record<string, GridPlace> = {
  ArrowUp: { row: -1, column: 0 },
  ArrowDown: { row: 1, column: 0 },
  ArrowLeft: { row: 0, column: -1 },
  ArrowRight: { row: 0, column: 1 },
};

/** The deed of a key; undefined for keys that are the browser's. */
export function deedOf(key: Key, at: GridPlace, size: { rows: number; columns: number }): GridDeed | undefined {
  const control = key.ctrlKey || key.metaKey;
  if (control) return controlDeed(key, size);
  if (key.altKey) {
    if (key.key === "ArrowUp") return { do: "move", by: -1 };
    return key.key === "ArrowDown" ? { do: "move", by: 1 } : undefined;
  }
  const step = arrows[key.key];
  if (step) return { do: "go", to: within({ row: at.row + step.row, column: at.column + step.column }, size) };
  if (key.key === "Home") return { do: "go", to: { ...at, column: 0 } };
  if (key.key === "End") return { do: "go", to: { ...at, column: size.columns - 1 } };
  if (key.key === "Enter" || key.key === "F2") return { do: "write" };
  if (key.key === "Delete" || key.key === "Backspace") return { do: "clear" };
  if (key.key === "Insert") return { do: "add" };
  return key.key.length === 1 ? { do: "write", entry: key.key } : undefined;
}

function controlDeed(key: Key, size: { rows: number; columns: number }): GridDeed | undefined {
  switch (key.key) {
    case "z":
      return { do: "undo" };
    case "Z":
    case "y":
      return { do: "redo" };
    case "Delete":
      return { do: "remove" };
    case "Home":
      return { do: "go", to: { row: 0, column: 0 } };
    case "End":
      return { do: "go", to: within({ row: size.rows, column: size.columns }, size) };
    case "Enter":
      return { do: "add" };
    default:
      return undefined;
  }
}

/** The nearest place that is there. */
export function within({ row, column }: GridPlace, size: { rows: number; columns: number }): GridPlace {
  const clamp = (value: number, count: number) => Math.max(0, Math.min(value, count - 1));
  return { row: clamp(row, size.rows), column: clamp(column, size.columns) };
}
