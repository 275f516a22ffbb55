"use client";

import type { ReactNode } from "react";
import { Button, LinkButton } from "@/app/_components/button";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import type { LayoutView } from "@/lib/services/layouts/get-layout";
import { DraftStatus } from "./draft/draft-status";
import type { DraftState } from "./draft/use-draft";
import type { Judged } from "./judge-text";

interface EditorTitleProps {
  family: string;
  title: string;
  layout: LayoutView | undefined;
  judged: Judged;
  draft: DraftState;
  writable: boolean;
  mayWrite: boolean;
  asked: boolean;
  pending: "add" | "submit" | "take-back" | undefined;
  onAdd: () => void;
  onMove: (move: "submit" | "take-back") => void;
}

/** What this is, how it stands, which step it is, and the one thing to do next. */
export function EditorTitle(props: EditorTitleProps) {
  const { family, title, layout, judged, draft, writable, mayWrite, asked, pending, onAdd, onMove } = props;
  const state = layout?.state ?? "draft";
  const broken = judged.errors.length > 0;
  const undecided = draft.conflict !== null || draft.news?.kind === "text";
  const compare =
    layout && judged.previous
      ? `/compare?kind=layouts&family=${family}&fromLayout=${judged.previous}&toLayout=${layout.version}`
      : undefined;
  return (
    <TitleRow
      breadcrumb={[
        { name: "Families", href: "/families" },
        { name: family, href: `/families/${family}` },
        { name: "Layouts", href: `/families/${family}/layouts` },
        { name: layout?.version ?? "New layout" },
      ]}
      title={title}
      state={stateOf("layout", state)}
      note={
        writable ? (
          <span role="status">
            <DraftStatus state={draft} layout={layout} /> · {stepText(judged)}
          </span>
        ) : (
          (layout && `written by ${layout.makers.join(", ")}`) || undefined
        )
      }
      actions={
        <>
          {compare && !(mayWrite && layout && state !== "draft") ? (
            <LinkButton href={compare}>Compare with {judged.previous}</LinkButton>
          ) : null}
          {writable && !layout ? (
            <Button look="primary" pending={pending === "add"} disabled={broken} onClick={onAdd}>
              Add as a draft
            </Button>
          ) : null}
          {writable && layout ? (
            <Button
              look="primary"
              pending={pending === "submit"}
              disabled={broken || undecided}
              title={undecided ? "First choose which text goes on" : undefined}
              onClick={() => onMove("submit")}
            >
              Ask for publishing
            </Button>
          ) : null}
          {state === "in-review" && asked ? (
            <Button pending={pending === "take-back"} onClick={() => onMove("take-back")}>
              Take back
            </Button>
          ) : null}
          {mayWrite && layout && state !== "draft" ? (
            <LinkButton href={`/families/${family}/layouts/new?from=${layout.version}`}>
              New layout from this
            </LinkButton>
          ) : null}
        </>
      }
    />
  );
}

/** The step with its weightiest reason. */
function stepText({ step, previous, errors, reasons }: Judged): ReactNode {
  if (errors.length > 0 && step === null) return "the step is told once nothing is left to mend";
  if (step === null || previous === null) return "nothing published to compare with";
  const weightiest = reasons.filter((reason) => reason.step === step);
  const [first] = weightiest;
  const more = weightiest.length > 1 ? `, and ${weightiest.length - 1} more` : "";
  return (
    <>
      step <strong>{step}</strong>:{" "}
      {first ? `${first.message.split(": firmware")[0]}${more}` : "only the version differs"}
    </>
  );
}
