import * as core from "monaco-editor/editor";
import type { TextEdit } from "@/lib/domain/json-edits";

/** A stretch of the text: offset of its first character and of the one after its last. */
export interface TextSpan {
  from: number;
  end: number;
}

/** What a page can do with an open editor. Edits from outside go through its model, so that there is one history. */
export interface EditorHandle {
  text(): string;
  /** Does edits as one step of undo. */
  edit(edits: readonly TextEdit[]): void;
  /** Puts another text in place of all, as one step of undo. */
  replace(text: string): void;
  undo(): void;
  redo(): void;
  /** Brings a place into sight with the cursor on it. */
  show(span: TextSpan, options?: { focus?: boolean }): void;
  focus(): void;
}

type CodeEditor = core.editor.IStandaloneCodeEditor;

/** The handle of a mounted editor. */
export function handleOf(editor: CodeEditor): EditorHandle {
  const model = () => editor.getModel() as core.editor.ITextModel;
  const edit = (edits: readonly TextEdit[]) => {
    if (edits.length === 0) return;
    const operations = edits.map(({ from, end, text }) => ({ range: rangeOf(model(), { from, end }), text }));
    model().pushStackElement();
    model().pushEditOperations(null, operations, () => null);
    model().pushStackElement();
  };
  return {
    text: () => model().getValue(),
    edit,
    replace: (text) => edit([{ from: 0, end: model().getValueLength(), text }]),
    undo: () => void model().undo(),
    redo: () => void model().redo(),
    show: (span, { focus = false } = {}) => {
      const { lineNumber, column } = model().getPositionAt(span.from);
      editor.setPosition({ lineNumber, column });
      editor.revealRangeInCenterIfOutsideViewport(rangeOf(model(), span));
      if (focus) editor.focus();
    },
    focus: () => editor.focus(),
  };
}

/** Offsets as lines and columns. */
export function rangeOf(model: core.editor.ITextModel, { from, end }: TextSpan): core.Range {
  return core.Range.fromPositions(model.getPositionAt(from), model.getPositionAt(end));
}
