import Link from "next/link";
import { Fragment, type ReactNode } from "react";
import { StateMark, type StateMarkProps } from "@/app/_components/state/state-mark";

export interface TitleRowProps {
  /** Way down to here; the last entry has no address. */
  breadcrumb?: readonly { name: string; href?: string }[];
  title: string;
  /** Serials and codes are set in figures that can't be confused. */
  code?: boolean;
  state?: StateMarkProps;
  /** A small `SealMark`, where the object has a digest. */
  seal?: ReactNode;
  /** One line: who, when, with what. */
  note?: ReactNode;
  /** At most two actions, the likelier one last. */
  actions?: ReactNode;
}

/** First thing on a page: what this is, its state, its seal, and at most two actions. */
export function TitleRow({ breadcrumb = [], title, code, state, seal, note, actions }: TitleRowProps) {
  return (
    <div className="mb-4">
      {breadcrumb.length ? (
        <nav aria-label="Way" className="mb-0.5 text-sm text-ink-soft">
          {breadcrumb.map((step, index) => (
            <Fragment key={step.name}>
              {index ? <span aria-hidden="true"> / </span> : null}
              {step.href ? (
                <Link href={step.href} className="no-underline hover:underline">
                  {step.name}
                </Link>
              ) : (
                step.name
              )}
            </Fragment>
          ))}
        </nav>
      ) : null}
      <div className="flex flex-wrap items-center gap-x-4 gap-y-2">
        <h1 className={`text-lg tracking-[-0.005em] md:text-[25px] ${code ? "font-mono" : ""}`}>{title}</h1>
        {state ? <StateMark {...state} /> : null}
        {seal}
        {note ? <div className="min-w-0 text-sm text-ink-soft">{note}</div> : null}
        {actions ? (
          <div className="flex w-full flex-wrap gap-2.5 sm:ml-auto sm:w-auto print:hidden">{actions}</div>
        ) : null}
      </div>
    </div>
  );
}
