"use client";

import { Printer } from "lucide-react";
import type { ReactNode } from "react";
import { Button, type ButtonLook } from "@/app/_components/button";

/** Opens the browser's print dialog for the page as it stands. */
export function PrintButton({ look = "primary", children }: { look?: ButtonLook; children: ReactNode }) {
  return (
    <Button look={look} onClick={() => window.print()}>
      <Printer size={16} aria-hidden />
      {children}
    </Button>
  );
}
