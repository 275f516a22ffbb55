import Link from "next/link";
import type { ButtonHTMLAttributes, ReactNode } from "react";

/** primary: the one action of the page; outline: a second one of weight; quiet: the rest; danger: stops or removes. */
export type ButtonLook = "primary" | "outline" | "quiet" | "danger";

const looks: Record<ButtonLook, string> = {
  primary:
    "border-copper bg-copper font-semibold text-on-copper hover:border-copper-strong hover:bg-copper-strong hover:text-on-copper",
  outline: "border-copper font-semibold text-copper-strong hover:bg-tint hover:text-copper-strong",
  quiet: "border-rule font-medium text-ink hover:border-ink-faint hover:text-ink",
  danger: "border-oxide font-semibold text-oxide hover:bg-oxide hover:text-raised",
};

const shape =
  "inline-flex items-center justify-center gap-2 rounded border px-4 text-center leading-tight no-underline transition-colors disabled:cursor-not-allowed disabled:border-rule disabled:bg-sunk disabled:text-ink-soft print:hidden";

/** Classes of a button, for elements that have to be something else, as a file input's label. */
export function buttonClass(look: ButtonLook, wide = false): string {
  return `${shape} ${looks[look]} ${wide ? "min-h-[42px] w-full" : "min-h-9"}`;
}

interface Look {
  look?: ButtonLook;
  /** Full width and higher, for the last step of a form. */
  wide?: boolean;
  children: ReactNode;
}

export interface ButtonProps extends Look, Omit<ButtonHTMLAttributes<HTMLButtonElement>, "className" | "children"> {
  /** While the action runs: the button is disabled and says so. */
  pending?: boolean;
  /** Word while it runs, as "Approving". */
  pendingText?: string;
}

export function Button({
  look = "quiet",
  wide,
  pending,
  pendingText,
  children,
  type = "button",
  ...rest
}: ButtonProps) {
  return (
    <button
      {...rest}
      type={type}
      disabled={rest.disabled || pending}
      aria-busy={pending || undefined}
      className={buttonClass(look, wide)}
    >
      {pending ? (
        <>
          <svg width="14" height="14" viewBox="0 0 14 14" aria-hidden="true" className="animate-spin">
            <circle cx="7" cy="7" r="5.5" fill="none" stroke="currentColor" strokeWidth="2" strokeDasharray="22 14" />
          </svg>
          {pendingText ?? children}
        </>
      ) : (
        children
      )}
    </button>
  );
}

/** A link that looks like a button, for actions that lead to a page or start a download. */
export function LinkButton({
  href,
  look = "quiet",
  wide,
  download,
  children,
}: Look & { href: string; download?: boolean | string }) {
  // Downloads and API addresses are no pages: the router must leave them alone.
  if (download !== undefined || href.startsWith("/api/")) {
    return (
      <a href={href} download={download} className={buttonClass(look, wide)}>
        {children}
      </a>
    );
  }
  return (
    <Link href={href} className={buttonClass(look, wide)}>
      {children}
    </Link>
  );
}
