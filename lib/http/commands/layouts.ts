import { READERS } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";
import { command, type Upload } from "@/lib/http/command";
import { parseJson } from "@/lib/http/read-body";
import type { PersonCtx } from "@/lib/services/context";
import * as decide from "@/lib/services/layouts/decide-layout";
import { getDraftText } from "@/lib/services/layouts/get-draft-text";
import * as read from "@/lib/services/layouts/get-layout";
import { getLayoutUse } from "@/lib/services/layouts/get-layout-use";
import { keepDraftText } from "@/lib/services/layouts/keep-draft-text";
import { lintDocument } from "@/lib/services/layouts/lint-document";
import * as write from "@/lib/services/layouts/write-layout";
import { byCodeOrId, decision, pageQuery } from "@/schemas/api/common";
import {
  keptText,
  LAYOUT_MAX_BYTES,
  layoutList,
  layoutPath,
  layoutReply,
  layoutUses,
  lintReply,
  retireBody,
  saveQuery,
  storedText,
  textQuery,
} from "@/schemas/api/layouts";

const readers = { who: "person", roles: READERS } as const;
const engineer = { who: "person", roles: ["engineer"] } as const;
/** Taken as bytes, because the author's own text is kept. */
const documentBody = { upload: { contentTypes: ["application/json"], maxBytes: LAYOUT_MAX_BYTES } } as const;

/** @throws AppError `request.malformed` */
function writtenOf({ bytes }: Upload): write.WrittenLayout {
  const document = parseJson(bytes);
  return { source: bytes.toString("utf8"), document };
}

/** @throws AppError `request.malformed` */
function textOf({ bytes }: Upload): string {
  try {
    return new TextDecoder("utf-8", { fatal: true, ignoreBOM: true }).decode(bytes);
  } catch (cause) {
    throw new AppError("request.malformed", { message: "The text is not UTF-8." }, { cause });
  }
}

const keyOf = (params: { code: string; version: string }): write.LayoutKey => ({
  family: params.code,
  version: params.version,
});

async function then(ctx: PersonCtx, params: { code: string; version: string }, act: Promise<void>) {
  await act;
  return read.getLayout(ctx, keyOf(params));
}

/** The draft that was edited, from `?draft=` or If-Match. @throws AppError `request.invalid` */
function draftOf(query: { draft?: number }, headers: Headers): number | undefined {
  const match = headers.get("if-match");
  if (query.draft !== undefined || match === null || match === "*") return query.draft;
  const number = /^"?(\d+)"?$/.exec(match)?.[1];
  if (number === undefined)
    throw new AppError("request.invalid", { message: 'If-Match takes the draft\'s number, as "3".' });
  return Number(number);
}

export const lintLayout = command({
  id: "layouts.lint",
  method: "POST",
  path: "/families/{code}/layouts/lint",
  summary: "Judges a layout document without storing it",
  access: { who: "person", roles: ["engineer", "reviewer"], reads: true },
  params: byCodeOrId,
  body: documentBody,
  reply: { status: 200, schema: lintReply },
  errors: ["family.not_found"],
  handle: (ctx, { params, body }) => lintDocument(ctx, { family: params.code, document: writtenOf(body).document }),
});

export const listLayouts = command({
  id: "layouts.list",
  method: "GET",
  path: "/families/{code}/layouts",
  summary: "A family's layouts, the newest written first",
  access: readers,
  params: byCodeOrId,
  query: pageQuery,
  reply: { status: 200, schema: layoutList },
  errors: ["family.not_found"],
  handle: (ctx, { params, query }) => read.listLayouts(ctx, { ...query, family: params.code }),
});

export const createLayout = command({
  id: "layouts.create",
  method: "POST",
  path: "/families/{code}/layouts",
  summary: "Adds a layout document as a draft",
  access: engineer,
  params: byCodeOrId,
  body: documentBody,
  reply: { status: 201, schema: layoutReply },
  errors: ["family.not_found", "layout.exists", "layout.invalid"],
  idempotent: true,
  handle: async (ctx, { params, body }) =>
    read.getLayout(ctx, await write.addLayout(ctx, { ...writtenOf(body), family: params.code })),
});

export const getLayout = command({
  id: "layouts.get",
  method: "GET",
  path: "/families/{code}/layouts/{version}",
  summary: "A layout with its document",
  access: readers,
  params: layoutPath,
  reply: { status: 200, schema: layoutReply },
  errors: ["family.not_found", "layout.not_found"],
  handle: (ctx, { params }) => read.getLayout(ctx, keyOf(params)),
});

export const saveLayout = command({
  id: "layouts.save",
  method: "PUT",
  path: "/families/{code}/layouts/{version}",
  summary: "Saves a draft anew; with ?draft= or If-Match only over the draft that was edited",
  access: engineer,
  params: layoutPath,
  query: saveQuery,
  body: documentBody,
  reply: { status: 200, schema: layoutReply },
  errors: [
    "layout.not_found",
    "layout.wrong_state",
    "layout.draft_changed",
    "layout.version_differs",
    "layout.invalid",
  ],
  handle: (ctx, { params, query, body, headers }) => {
    const input = { ...keyOf(params), ...writtenOf(body), draft: draftOf(query, headers) };
    return then(ctx, params, write.saveLayout(ctx, input));
  },
});

export const getLayoutText = command({
  id: "layouts.text",
  method: "GET",
  path: "/families/{code}/layouts/{version}/text",
  summary: "A layout's text and who saved it; with ?draft= the text only if another draft stands there now",
  access: readers,
  params: layoutPath,
  query: textQuery,
  reply: { status: 200, schema: storedText },
  errors: ["family.not_found", "layout.not_found"],
  handle: (ctx, { params, query }) => getDraftText(ctx, { ...keyOf(params), known: query.draft }),
});

export const keepLayoutText = command({
  id: "layouts.keep-text",
  method: "PUT",
  path: "/families/{code}/layouts/{version}/text",
  summary:
    "Keeps a draft's text while it is typed, finished or not; ?draft= or If-Match names the draft that was edited",
  access: engineer,
  params: layoutPath,
  query: saveQuery,
  body: { upload: { contentTypes: ["application/json", "text/plain"], maxBytes: LAYOUT_MAX_BYTES } },
  reply: { status: 200, schema: keptText },
  errors: ["layout.not_found", "layout.wrong_state", "layout.draft_changed", "request.invalid"],
  handle: (ctx, { params, query, body, headers }) => {
    const draft = draftOf(query, headers);
    if (draft === undefined) throw new AppError("request.invalid", { message: "Name the draft you edited: ?draft=3." });
    return keepDraftText(ctx, { ...keyOf(params), source: textOf(body), draft });
  },
});

export const getUse = command({
  id: "layouts.use",
  method: "GET",
  path: "/families/{code}/layouts/{version}/use",
  summary: "Lots with packages built from a layout",
  access: readers,
  params: layoutPath,
  query: pageQuery,
  reply: { status: 200, schema: layoutUses },
  errors: ["family.not_found", "layout.not_found"],
  handle: (ctx, { params, query }) => getLayoutUse(ctx, { ...query, ...keyOf(params) }),
});

export const deleteLayout = command({
  id: "layouts.delete",
  method: "DELETE",
  path: "/families/{code}/layouts/{version}",
  summary: "Drops a draft",
  access: engineer,
  params: layoutPath,
  reply: { status: 204 },
  errors: ["layout.not_found", "layout.wrong_state"],
  handle: async (ctx, { params }) => {
    await write.dropLayout(ctx, keyOf(params));
    return new Response(null, { status: 204 });
  },
});

export const submitLayout = command({
  id: "layouts.submit",
  method: "POST",
  path: "/families/{code}/layouts/{version}/submit",
  summary: "Asks a second person to publish a layout",
  access: engineer,
  params: layoutPath,
  reply: { status: 200, schema: layoutReply },
  errors: ["layout.not_found", "layout.wrong_state", "layout.unfinished", "layout.invalid"],
  handle: (ctx, { params }) => then(ctx, params, decide.submitLayout(ctx, keyOf(params))),
});

export const takeBackLayout = command({
  id: "layouts.take-back",
  method: "POST",
  path: "/families/{code}/layouts/{version}/take-back",
  summary: "Makes a layout under review a draft again; by who submitted it",
  access: engineer,
  params: layoutPath,
  reply: { status: 200, schema: layoutReply },
  errors: ["layout.not_found", "layout.wrong_state"],
  handle: (ctx, { params }) => then(ctx, params, decide.takeBackLayout(ctx, keyOf(params))),
});

export const decideLayout = command({
  id: "layouts.decide",
  method: "POST",
  path: "/families/{code}/layouts/{version}/decisions",
  summary: "Publishes or refuses a layout; by a reviewer who didn't write it",
  access: { who: "person", roles: ["reviewer"], session: true },
  params: layoutPath,
  body: decision,
  reply: { status: 200, schema: layoutReply },
  errors: ["layout.not_found", "layout.wrong_state", "layout.self_approval", "layout.invalid", "auth.password_wrong"],
  handle: (ctx, { params, body }) => then(ctx, params, decide.decideLayout(ctx, { ...body, ...keyOf(params) })),
});

export const retireLayout = command({
  id: "layouts.retire",
  method: "POST",
  path: "/families/{code}/layouts/{version}/retire",
  summary: "Takes a published layout out of use for new packages",
  access: { who: "person", roles: ["engineer", "reviewer"] },
  params: layoutPath,
  body: retireBody,
  reply: { status: 200, schema: layoutReply },
  errors: ["layout.not_found", "layout.wrong_state"],
  handle: (ctx, { params, body }) =>
    then(ctx, params, decide.retireLayout(ctx, { ...keyOf(params), reason: body.reason })),
});

export const layoutCommands = [
  lintLayout,
  listLayouts,
  createLayout,
  getLayout,
  saveLayout,
  getLayoutText,
  keepLayoutText,
  getUse,
  deleteLayout,
  submitLayout,
  takeBackLayout,
  decideLayout,
  retireLayout,
];
