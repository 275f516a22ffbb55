import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import type { PersonCtx } from "@/lib/services/context";
import { addFamily, addFamilyRevision } from "@/lib/services/families/add-family";
import {
  decideFamilyRevision,
  submitFamilyRevision,
  takeBackFamilyRevision,
} from "@/lib/services/families/decide-family-revision";
import * as read from "@/lib/services/families/get-family";
import { byCodeOrId, decision, pageQuery } from "@/schemas/api/common";
import { familyDocument, familyList, familyReply, familyRevisionReply, revisionPath } from "@/schemas/api/families";

const readers = { who: "person", roles: READERS } as const;
const engineer = { who: "person", roles: ["engineer"] } as const;

export const listFamilies = command({
  id: "families.list",
  method: "GET",
  path: "/families",
  summary: "Families by code",
  access: readers,
  query: pageQuery,
  reply: { status: 200, schema: familyList },
  handle: (ctx, { query }) => read.listFamilies(ctx, query),
});

export const createFamily = command({
  id: "families.create",
  method: "POST",
  path: "/families",
  summary: "Adds a family with revision 1 as a draft",
  access: engineer,
  body: familyDocument,
  reply: { status: 201, schema: familyRevisionReply },
  errors: ["family.exists"],
  idempotent: true,
  handle: async (ctx, { body }) => {
    const { familyId, number } = await addFamily(ctx, body);
    return read.getFamilyRevisionView(ctx, familyId, number);
  },
});

export const getFamily = command({
  id: "families.get",
  method: "GET",
  path: "/families/{code}",
  summary: "A family with its revisions",
  access: readers,
  params: byCodeOrId,
  reply: { status: 200, schema: familyReply },
  errors: ["family.not_found"],
  handle: (ctx, { params }) => read.getFamily(ctx, params.code),
});

export const createFamilyRevision = command({
  id: "families.revise",
  method: "POST",
  path: "/families/{code}/revisions",
  summary: "Adds the next revision as a draft",
  access: engineer,
  params: byCodeOrId,
  body: familyDocument,
  reply: { status: 201, schema: familyRevisionReply },
  errors: ["family.not_found", "family.code_differs"],
  idempotent: true,
  handle: async (ctx, { params, body }) => {
    const { familyId, number } = await addFamilyRevision(ctx, { family: params.code, document: body });
    return read.getFamilyRevisionView(ctx, familyId, number);
  },
});

type RevisionParams = { code: string; n: number };

async function then(ctx: PersonCtx, { code, n }: RevisionParams, act: Promise<void>) {
  await act;
  return read.getFamilyRevisionView(ctx, code, n);
}

export const submitRevision = command({
  id: "families.submit-revision",
  method: "POST",
  path: "/families/{code}/revisions/{n}/submit",
  summary: "Asks a second person to publish a revision",
  access: engineer,
  params: revisionPath,
  reply: { status: 200, schema: familyRevisionReply },
  errors: ["family.not_found", "family-revision.not_found", "family.wrong_state"],
  handle: (ctx, { params }) => then(ctx, params, submitFamilyRevision(ctx, { family: params.code, number: params.n })),
});

export const takeBackRevision = command({
  id: "families.take-back-revision",
  method: "POST",
  path: "/families/{code}/revisions/{n}/take-back",
  summary: "Makes a revision under review a draft again; by who submitted it",
  access: engineer,
  params: revisionPath,
  reply: { status: 200, schema: familyRevisionReply },
  errors: ["family.not_found", "family-revision.not_found", "family.wrong_state"],
  handle: (ctx, { params }) =>
    then(ctx, params, takeBackFamilyRevision(ctx, { family: params.code, number: params.n })),
});

export const decideRevision = command({
  id: "families.decide-revision",
  method: "POST",
  path: "/families/{code}/revisions/{n}/decisions",
  summary: "Publishes or refuses a revision; by a reviewer who didn't write it",
  access: { who: "person", roles: ["reviewer"], session: true },
  params: revisionPath,
  body: decision,
  reply: { status: 200, schema: familyRevisionReply },
  errors: [
    "family.not_found",
    "family-revision.not_found",
    "family.wrong_state",
    "family.self_approval",
    "auth.password_wrong",
  ],
  handle: (ctx, { params, body }) =>
    then(ctx, params, decideFamilyRevision(ctx, { ...body, family: params.code, number: params.n })),
});

export const familyCommands = [
  listFamilies,
  createFamily,
  getFamily,
  createFamilyRevision,
  submitRevision,
  takeBackRevision,
  decideRevision,
];
