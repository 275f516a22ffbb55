"use client";

import { useRouter } from "next/navigation";
import { type ReactNode, useCallback, useDeferredValue, useEffect, useMemo, useRef, useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import type { EditorHandle } from "@/app/_components/editor/editor-handle";
import { MonacoJson } from "@/app/_components/editor/monaco-json";
import { FormError } from "@/app/_components/form/form-error";
import { useToast } from "@/app/_components/toast";
import type { Mend } from "@/builders/codec/mend/mend-context";
import { nearestSpan } from "@/lib/domain/json-positions";
import type { LayoutView } from "@/lib/services/layouts/get-layout";
import type { LintBasis } from "@/lib/services/layouts/lint-document";
import layoutSchema from "@/schemas/documents/layout.schema.json";
import { DifferenceCard, type OtherVersion } from "./difference-card";
import { ConflictDialog } from "./draft/conflict-dialog";
import { DraftNews } from "./draft/draft-news";
import { LocalCopyNotice } from "./draft/local-copy-notice";
import { type DraftConflict, useDraft } from "./draft/use-draft";
import { useLayoutMoves } from "./draft/use-layout-moves";
import { EditorTitle } from "./editor-title";
import { EditorTools } from "./editor-tools";
import { judgeText, partAt } from "./judge-text";
import { LintList, MemoryCard } from "./judged-cards";
import { LayoutEnd } from "./layout-end";
import { encodeSample } from "./sample/encode-sample";
import { SampleCard } from "./sample/sample-card";
import { inventedSample, useGivenDevice } from "./sample/sample-choice";
import { PartTables } from "./table/part-tables";
import { TemplateChoice } from "./template-choice";

export interface LayoutEditorProps {
  family: string;
  /** What is judged against. */
  basis: LintBasis;
  /** The stored layout; left out for a new one. */
  layout?: LayoutView;
  /** Text to begin with; that of a stored layout set out to be read. */
  source: string;
  /** Other versions of the family. */
  others: readonly OtherVersion[];
  /** Codes of the family's lots, for the sample. */
  lots: readonly string[];
  /** Lots with live packages or packages under way from this layout, for the warning before it is retired. */
  uses?: Parameters<typeof LayoutEnd>[0]["uses"];
  /** The person is an engineer. */
  mayWrite: boolean;
  /** The person asked for publishing, so may take it back. */
  asked: boolean;
  /** Full width above the editor: the signing panel. */
  above?: ReactNode;
}

/** A layout's text beside what it means: memory map, findings, a sample device, and its fields as a table. */
export function LayoutEditor(props: LayoutEditorProps) {
  const { family, layout, source, others, lots, uses = [], mayWrite, asked, above } = props;
  const tell = useToast();
  const router = useRouter();
  const handle = useRef<EditorHandle>(null);
  const state = layout?.state ?? "draft";
  const writable = mayWrite && state === "draft";
  const version = layout?.version;
  const draft = useDraft({
    family,
    version,
    draft: layout?.draft,
    unfinished: layout?.unfinished ?? false,
    writable,
  });
  const [text, setText] = useState(source);
  const { pending, problem, add, move } = useLayoutMoves(family, layout, draft.save);
  const [later, setLater] = useState(false);
  const [copy, setCopy] = useState<string>();

  // Judging follows the typing, it never holds a key back.
  const judgedText = useDeferredValue(text);
  const basis = useMemo(
    () => (version === undefined ? props.basis : { ...props.basis, draftVersion: version }),
    [props.basis, version],
  );
  const judged = useMemo(() => judgeText(judgedText, basis), [judgedText, basis]);
  const [origin, setOrigin] = useState(inventedSample);
  const given = useGivenDevice(origin);
  const sample = judged.layout && encodeSample(judged.layout, basis.family, given);

  const [pointed, setPointed] = useState<string>();
  const [offset, setOffset] = useState<number>();
  const atCursor = useMemo(() => (offset === undefined ? undefined : partAt(judged, offset)), [judged, offset]);
  const shown = pointed ?? atCursor;

  const change = useCallback(
    (next: string) => {
      setText(next);
      draft.type(next);
    },
    [draft.type],
  );
  const ready = useCallback(
    (opened: EditorHandle) => {
      handle.current = opened;
      draft.open(opened.text());
    },
    [draft.open],
  );
  const show = (path: string) => handle.current?.show(nearestSpan(judged.spans, path), { focus: true });
  const mend = ({ edits }: Mend) => {
    // A mend is made for one text; if that has moved on, the finding is judged anew in a moment.
    if (handle.current?.text() === judged.text) handle.current.edit(edits);
  };
  const replace = (next: string, words: string) => {
    handle.current?.replace(next);
    tell({ tone: "info", title: words, text: "One undo brings the text before it back." });
  };

  useSaveKey(draft.save);
  useLeaveWarning(writable && ["typing", "saving", "offline", "refused"].includes(draft.state.status));

  // A text that was set out for reading only goes out as it is stored.
  const exported = () => {
    const now = handle.current?.text() ?? text;
    return layout && now === source ? layout.source : now;
  };

  const { conflict, news } = draft.state;
  const choose = (theirs: DraftConflict, chosen: string, words: string) => {
    // Theirs goes through the editor too, so that it stands in the history beside mine.
    handle.current?.replace(theirs.theirs);
    draft.settle(theirs);
    replace(chosen, words);
  };
  const title = layout ? `Layout ${layout.version} of ${family}` : `New layout of ${family}`;
  const encoded = sample && "rows" in sample ? sample : null;
  return (
    <>
      <EditorTitle
        family={family}
        title={title}
        layout={layout}
        judged={judged}
        draft={draft.state}
        writable={writable}
        mayWrite={mayWrite}
        asked={asked}
        pending={pending}
        onAdd={() => void add(text)}
        onMove={move}
      />
      <div className="flex flex-col gap-[18px]">
        <FormError problem={problem ?? draft.state.problem} />
        {conflict && later ? (
          <p className="flex flex-wrap items-center gap-3 text-sm">
            {conflict.by} saved another text of this draft; yours is not saved until you choose.
            <Button look="outline" onClick={() => setLater(false)}>
              Choose now
            </Button>
          </p>
        ) : null}
        {news ? (
          <DraftNews
            news={news}
            family={family}
            draft={draft.state.draft}
            typed={draft.state.status !== "saved"}
            onTake={(theirs) => choose(theirs, theirs.theirs, `${theirs.by}’s text is taken`)}
            onCompare={draft.meet}
            onReload={router.refresh}
          />
        ) : null}
        {above}
        {writable ? (
          <LocalCopyNotice
            family={family}
            version={version}
            draft={layout?.draft}
            source={source}
            onTake={(copy) => replace(copy, "The text of this browser is taken")}
            onCompare={setCopy}
          />
        ) : null}
        {writable && !layout ? <TemplateChoice family={family} onChoose={replace} /> : null}
        <EditorTools
          writable={writable}
          sheet={layout && `/families/${family}/layouts/${layout.version}/sheet`}
          fileName={`${family}-layout-${version ?? "new"}.json`}
          text={exported}
          onUndo={() => handle.current?.undo()}
          onRedo={() => handle.current?.redo()}
          onImport={(imported, name) => replace(imported, `${name} is taken`)}
        />
        <div className="grid items-start gap-[18px] lg:grid-cols-[minmax(0,5fr)_minmax(0,6fr)]">
          <Card>
            <MonacoJson
              initialText={source}
              onChange={change}
              onReady={ready}
              onPoint={setOffset}
              {...(pointed !== undefined && { shown: nearestSpan(judged.spans, pointed) })}
              schema={layoutSchema}
              readOnly={!writable}
              markers={judged.markers}
              label={`${title}, JSON`}
              height="min(760px, 80vh)"
            />
            {writable ? (
              <p className="mt-2 text-xs text-ink-soft">
                Ctrl+Space lists what fits, Ctrl+M lets Tab leave the editor, Ctrl+S saves at once.
              </p>
            ) : null}
          </Card>
          <div className="flex min-w-0 flex-col gap-[18px]">
            <MemoryCard judged={judged} sample={encoded} shown={shown} onPoint={setPointed} onChoose={show} />
            <LintList judged={judged} basis={basis} {...(writable && { onMend: mend })} onShow={show} />
            <SampleCard
              layout={judged.layout}
              sample={sample}
              origin={origin}
              lots={lots}
              shown={shown}
              onOrigin={setOrigin}
              onPoint={setPointed}
            />
          </div>
        </div>
        <PartTables judged={judged} handle={handle} readOnly={!writable} shown={shown} onPoint={setPointed} />
        <DifferenceCard family={family} judged={judged} others={others} />
        {layout ? <LayoutEnd family={family} layout={layout} uses={uses} mayWrite={mayWrite} /> : null}
      </div>
      {conflict && !later ? (
        <ConflictDialog
          conflict={conflict}
          mine={text}
          onLater={() => setLater(true)}
          onChoose={(chosen, words) => choose(conflict, chosen, words)}
        />
      ) : null}
      {copy !== undefined && layout ? (
        <ConflictDialog
          conflict={{ base: null, theirs: source, draft: layout.draft, by: layout.updatedBy, at: layout.updatedAt }}
          mine={copy}
          onLater={() => setCopy(undefined)}
          onChoose={(chosen, words) => {
            setCopy(undefined);
            replace(chosen, words);
          }}
        />
      ) : null}
    </>
  );
}

/** Ctrl+S saves at once instead of offering the page as a file. */
function useSaveKey(save: () => void): void {
  useEffect(() => {
    const press = (event: KeyboardEvent) => {
      if (!(event.ctrlKey || event.metaKey) || event.key !== "s") return;
      event.preventDefault();
      save();
    };
    window.addEventListener("keydown", press);
    return () => window.removeEventListener("keydown", press);
  }, [save]);
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
