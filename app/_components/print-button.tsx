"use client";

import { Printer } from "lucide-react";
import type { ReactNode } from "react";
import { Button, type ButtonLook } from "@/app/_components/button";
import { orderPrint } from "@/app/_components/print/use-print-order";

/** Opens the browser's print dialog for the page, with the rows of its tables. */
export function PrintButton({ look = "primary", children }: { look?: ButtonLook; children: ReactNode }) {
  return (
    <Button look={look} onClick={orderPrint}>
      <Printer size={16} aria-hidden />
      {children}
    </Button>
  );
}
