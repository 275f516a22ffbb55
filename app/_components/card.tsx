import type { ReactNode } from "react";

export interface CardProps {
  title?: ReactNode;
  /** Beside the title, soft. */
  note?: ReactNode;
  /** In the title's right end, as a link or a small button. */
  aside?: ReactNode;
  /** `sealed` frames what carries a signature or asks for one. */
  look?: "plain" | "sealed" | "caution" | "bad";
  children: ReactNode;
}

const borders = { plain: "border-rule", sealed: "border-verdigris", caution: "border-ochre", bad: "border-oxide" };

/** A raised sheet with a heading. Stack several with `flex flex-col gap-[18px]`. */
export function Card({ title, note, aside, look = "plain", children }: CardProps) {
  return (
    <section className={`min-w-0 rounded border bg-raised px-4 py-4 md:px-[18px] ${borders[look]}`}>
      {title || aside ? (
        <div className="mb-2 flex flex-wrap items-baseline gap-x-2.5 gap-y-1 break-after-avoid">
          {title ? <h2 className="text-md">{title}</h2> : null}
          {note ? <span className="text-sm text-ink-soft">{note}</span> : null}
          {aside ? <div className="ml-auto text-sm">{aside}</div> : null}
        </div>
      ) : null}
      {children}
    </section>
  );
}
