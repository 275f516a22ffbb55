"use client";

import { Printer } from "lucide-react";
import type { ReactNode } from "react";
import { Button } from "@/app/_components/button";

/** Opens the browser's print dialog for the page as it stands. */
export function PrintButton({ children }: { children: ReactNode }) {
  return (
    <Button look="primary" onClick={() => window.print()}>
      <Printer size={16} aria-hidden />
      {children}
    </Button>
  );
}
