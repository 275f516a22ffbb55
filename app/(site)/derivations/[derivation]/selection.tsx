"use client";

import { createContext, type ReactNode, useContext, useMemo, useState } from "react";

interface Selection {
  serials: ReadonlySet<string>;
  setSerials: (serials: ReadonlySet<string>) => void;
}

const SelectionContext = createContext<Selection>({ serials: new Set(), setSerials: () => {} });

/** Devices that are selected in the table and decided over in the panel: the same ones in both. */
export function SelectionProvider({ children }: { children: ReactNode }) {
  const [serials, setSerials] = useState<ReadonlySet<string>>(new Set());
  const value = useMemo(() => ({ serials, setSerials }), [serials]);
  return <SelectionContext value={value}>{children}</SelectionContext>;
}

export function useSelection(): Selection {
  return useContext(SelectionContext);
}
