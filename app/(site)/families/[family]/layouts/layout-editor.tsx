"use client";

import { useRouter } from "next/navigation";
import { type ReactNode, useDeferredValue, useEffect, useMemo, useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button, LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { MonacoJson } from "@/app/_components/editor/monaco-json";
import { FormError } from "@/app/_components/form/form-error";
import { stateOf } from "@/app/_components/state/state-of";
import { TitleRow } from "@/app/_components/title-row";
import { useToast } from "@/app/_components/toast";
import type { LayoutView } from "@/lib/services/layouts/get-layout";
import type { LintBasis } from "@/lib/services/layouts/lint-document";
import layoutSchema from "@/schemas/documents/layout.schema.json";
import { type Judged, judgeText } from "./judge-text";
import { Differences, LintList, MemoryCard, SampleCard } from "./judged-cards";
import { moveLayoutAction } from "./layout-actions";
import { LayoutEnd } from "./layout-end";

export interface LayoutEditorProps {
  family: string;
  /** What is judged against. */
  basis: LintBasis;
  /** The stored layout; left out for a new one. */
  layout?: LayoutView;
  /** Text to begin with. */
  source: string;
  /** The person is an engineer. */
  mayWrite: boolean;
  /** The person asked for publishing, so may take it back. */
  asked: boolean;
  /** Full width above the editor: the signing panel. */
  above?: ReactNode;
}

/** A layout's text beside what it means: memory map, findings, a sample device encoded and read back. */
export function LayoutEditor({ family, basis, layout, source, mayWrite, asked, above }: LayoutEditorProps) {
  const router = useRouter();
  const tell = useToast();
  const [text, setText] = useState(source);
  const [saved, setSaved] = useState({ text: layout ? source : "", draft: layout?.draft });
  const [pending, setPending] = useState<"save" | "submit" | "take-back">();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const judged = useMemo(() => judgeText(text, basis), [text, basis]);
  const shown = useDeferredValue(judged);
  const state = layout?.state ?? "draft";
  const writable = mayWrite && state === "draft";
  const dirty = writable && text !== saved.text;
  useLeaveWarning(dirty);

  const save = async () => {
    setPending("save");
    try {
      const path = `/api/v1/families/${family}/layouts`;
      const address = layout ? `${path}/${layout.version}?draft=${saved.draft}` : path;
      const call = { method: layout ? "PUT" : "POST", body: text, contentType: "application/json" } as const;
      const stored = await callApi<LayoutView>(address, call);
      setSaved({ text, draft: stored.draft });
      setProblem(null);
      tell({ tone: "good", title: `Layout ${stored.version} saved as a draft` });
      if (layout) router.refresh();
      else router.replace(`/families/${family}/layouts/${stored.version}`);
    } catch (error) {
      setProblem(problemOf(error));
    }
    setPending(undefined);
  };

  const move = async (name: "submit" | "take-back") => {
    if (!layout) return;
    setPending(name);
    const result = await moveLayoutAction({ code: family, version: layout.version }, name);
    setPending(undefined);
    setProblem(result.ok ? null : result.problem);
    if (!result.ok) return;
    const title = name === "submit" ? "It waits for a second person now" : "It is a draft again";
    tell({ tone: "good", title: `Layout ${layout.version}`, text: title });
    router.refresh();
  };

  const title = layout ? `Layout ${layout.version} of ${family}` : `New layout of ${family}`;
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Families", href: "/families" },
          { name: family, href: `/families/${family}` },
          { name: layout?.version ?? "New layout" },
        ]}
        title={title}
        state={stateOf("layout", state)}
        note={noteOf(layout, dirty, shown)}
        actions={
          <>
            {writable ? (
              <Button
                look={dirty ? "primary" : "quiet"}
                pending={pending === "save"}
                disabled={!dirty || shown.errors.length > 0}
                onClick={save}
              >
                {layout ? "Save draft" : "Add as a draft"}
              </Button>
            ) : null}
            {writable && layout ? (
              <Button
                look={dirty ? "quiet" : "primary"}
                pending={pending === "submit"}
                disabled={dirty || shown.errors.length > 0}
                onClick={() => move("submit")}
              >
                Ask for publishing
              </Button>
            ) : null}
            {state === "in-review" && asked ? (
              <Button pending={pending === "take-back"} onClick={() => move("take-back")}>
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
      <div className="flex flex-col gap-[18px]">
        <FormError problem={problem} />
        {above}
        <div className="grid items-start gap-[18px] lg:grid-cols-[minmax(0,5fr)_minmax(0,6fr)]">
          <Card>
            <MonacoJson
              value={text}
              onChange={setText}
              schema={layoutSchema}
              readOnly={!writable}
              markers={shown.markers}
              label={`${title}, JSON`}
              height="min(760px, 80vh)"
            />
            {writable ? (
              <p className="mt-2 text-xs text-ink-soft">
                Ctrl+Space lists what fits, Ctrl+M lets Tab leave the editor. A draft with errors can't be saved yet.
              </p>
            ) : null}
          </Card>
          <div className="flex min-w-0 flex-col gap-[18px]">
            <MemoryCard judged={shown} />
            <LintList judged={shown} />
            <Differences judged={shown} />
            <SampleCard judged={shown} />
          </div>
        </div>
        {layout ? <LayoutEnd family={family} layout={layout} mayWrite={mayWrite} /> : null}
      </div>
    </>
  );
}

function noteOf(
  layout: LayoutView | undefined,
  dirty: boolean,
  { step, previous, errors }: Pick<Judged, "step" | "previous" | "errors">,
): ReactNode {
  const first =
    errors.length > 0 ? "the step is told once nothing is left to mend" : "nothing published to compare with";
  const parts = [
    dirty ? "not saved" : layout ? `draft ${layout.draft} by ${layout.updatedBy}` : "not saved yet",
    step && previous ? `step ${step} against ${previous}` : first,
  ];
  return layout?.state === "published" || layout?.state === "retired"
    ? `written by ${layout.makers.join(", ")}`
    : parts.join(" · ");
}

/** Asks before the browser leaves a page with text that is not saved. */
function useLeaveWarning(dirty: boolean): void {
  useEffect(() => {
    if (!dirty) return;
    const warn = (event: BeforeUnloadEvent) => event.preventDefault();
    window.addEventListener("beforeunload", warn);
    return () => window.removeEventListener("beforeunload", warn);
  }, [dirty]);
}
