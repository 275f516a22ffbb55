"use client";

import { X } from "lucide-react";
import { Dialog as Radix } from "radix-ui";
import type { ReactNode } from "react";

export interface DialogProps {
  open: boolean;
  onOpenChange: (open: boolean) => void;
  title: string;
  /** One sentence under the title. */
  description?: ReactNode;
  children: ReactNode;
  /** `wide` for content such as a comparison. */
  size?: "normal" | "wide";
}

/** A dialog over the page: focus is trapped, Escape and the close button leave it, focus returns to where it was. */
export function Dialog({ open, onOpenChange, title, description, children, size = "normal" }: DialogProps) {
  return (
    <Radix.Root open={open} onOpenChange={onOpenChange}>
      <Radix.Portal>
        <Radix.Overlay className="fixed inset-0 z-40 bg-(--veil)" />
        <Radix.Content
          {...(description ? {} : { "aria-describedby": undefined })}
          className={`fixed top-1/2 left-1/2 z-50 max-h-[calc(100dvh-32px)] w-[calc(100vw-32px)] -translate-1/2 overflow-y-auto rounded border border-rule bg-raised p-5 shadow-(--overlay-shadow) ${
            size === "wide" ? "max-w-[900px]" : "max-w-[480px]"
          }`}
        >
          <div className="mb-3 flex items-start gap-3">
            <div className="min-w-0 flex-1">
              <Radix.Title className="text-md">{title}</Radix.Title>
              {description ? (
                <Radix.Description asChild>
                  <div className="mt-1 text-sm text-ink-soft">{description}</div>
                </Radix.Description>
              ) : null}
            </div>
            <Radix.Close aria-label="Close" className="rounded p-1 text-ink-soft hover:text-ink">
              <X size={16} aria-hidden />
            </Radix.Close>
          </div>
          {children}
        </Radix.Content>
      </Radix.Portal>
    </Radix.Root>
  );
}
