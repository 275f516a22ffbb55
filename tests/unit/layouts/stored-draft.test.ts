import { describe, expect, it } from "vitest";
import { hearStored, type StoredDraft } from "@/app/(site)/families/[family]/layouts/draft/stored-draft";
import { setOut } from "@/lib/domain/json-set-out";

const BASE = '{\n  "version": "1.1.0"\n}';
const MINE = '{\n  "version": "1.1.0",\n  "order": 1\n}';
const THEIRS = '{\n  "version": "1.1.0",\n  "order": 2\n}';

const held = { draft: 3, saved: BASE, text: MINE };
const stored = (change: Partial<StoredDraft> = {}): StoredDraft => ({
  state: "draft",
  draft: 4,
  unfinished: false,
  updatedAt: "2026-10-05T08:30:00.000Z",
  updatedBy: "Hanne Brook",
  submittedAt: null,
  submittedBy: null,
  source: THEIRS,
  ...change,
});

describe("hearStored", () => {
  it("finds nothing new in the draft that is open here", () => {
    expect(hearStored(held, stored({ draft: 3, source: null }))).toEqual({ kind: "nothing" });
    expect(hearStored({ ...held, draft: undefined }, stored({ source: null }))).toEqual({ kind: "nothing" });
  });

  it("tells who saved which text over it, with what both began with", () => {
    expect(hearStored(held, stored())).toEqual({
      kind: "news",
      news: {
        kind: "text",
        base: BASE,
        theirs: THEIRS,
        draft: 4,
        by: "Hanne Brook",
        at: "2026-10-05T08:30:00.000Z",
      },
    });
  });

  it("tells it too where nothing was typed here", () => {
    expect(hearStored({ ...held, text: BASE }, stored()).kind).toBe("news");
  });

  it("goes on from the new number where the text is one of ours", () => {
    // A save whose answer was lost, and one that was undone again elsewhere.
    expect(hearStored(held, stored({ source: MINE }))).toEqual({
      kind: "adopt",
      saved: MINE,
      draft: 4,
      by: "Hanne Brook",
    });
    expect(hearStored(held, stored({ source: BASE, draft: 5 }))).toMatchObject({
      kind: "adopt",
      saved: BASE,
      draft: 5,
    });
  });

  it("takes a text on one line as the editor sets it out", () => {
    const oneLine = JSON.stringify(JSON.parse(MINE));
    const text = setOut(oneLine);
    expect(hearStored({ ...held, text }, stored({ source: oneLine }))).toMatchObject({ kind: "adopt", saved: text });
  });

  it("is not fooled by a version that was dropped and begun anew under a lower number", () => {
    expect(hearStored(held, stored({ draft: 1 }))).toMatchObject({ kind: "news", news: { kind: "text", draft: 1 } });
  });

  it("tells that nobody writes it any more, whatever its number", () => {
    const asked = { state: "in-review", submittedBy: "Ines Harrow", submittedAt: "2026-10-05T09:00:00.000Z" } as const;
    expect(hearStored(held, stored({ ...asked, draft: 3, source: null }))).toEqual({
      kind: "news",
      news: { kind: "closed", state: "in-review", by: "Ines Harrow", at: "2026-10-05T09:00:00.000Z" },
    });
    expect(hearStored(held, "dropped")).toEqual({
      kind: "news",
      news: { kind: "closed", state: "dropped", by: null, at: null },
    });
  });
});
