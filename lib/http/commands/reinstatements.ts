import { READERS } from "@/lib/domain/roles";
import { askReinstatement as ask } from "@/lib/services/reinstatements/ask-reinstatement";
import { decideReinstatement as decide } from "@/lib/services/reinstatements/decide-reinstatement";
import { getReinstatementView, listLotReinstatements } from "@/lib/services/reinstatements/get-reinstatement";
import { byCodeOrId, byId, decision, idPageQuery } from "@/schemas/api/common";
import { newReinstatement, reinstatement, reinstatementPage } from "@/schemas/api/packages";
import { command } from "../command";

const blockedErrors = ["reinstatement.already_live", "reinstatement.withdrawn", "reinstatement.blocked"] as const;

export const listReinstatements = command({
  id: "reinstatements.list",
  method: "GET",
  path: "/lots/{code}/reinstatements",
  summary: "Requests to make an earlier release of a lot live again, newest first",
  access: { who: "person", roles: READERS },
  params: byCodeOrId,
  query: idPageQuery,
  reply: { status: 200, schema: reinstatementPage },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => listLotReinstatements(ctx, params.code, query),
});

export const askReinstatement = command({
  id: "reinstatements.ask",
  method: "POST",
  path: "/lots/{code}/reinstatements",
  summary: "Ask for an earlier release of a lot to be made live again",
  access: { who: "person", roles: ["engineer", "reviewer"], session: true },
  params: byCodeOrId,
  body: newReinstatement,
  reply: { status: 201, schema: reinstatement },
  errors: [
    "lot.not_found",
    "package.not_found",
    "package.wrong_state",
    "reinstatement.exists",
    ...blockedErrors,
    "auth.password_wrong",
    "auth.code_wrong",
  ],
  idempotent: true,
  handle: async (ctx, { params, body }) => getReinstatementView(ctx, await ask(ctx, { ...body, lot: params.code })),
});

export const decideReinstatement = command({
  id: "reinstatements.decide",
  method: "POST",
  path: "/reinstatements/{id}/decisions",
  summary: "Grant or refuse a reinstatement; granted, the earlier release goes live at once",
  access: { who: "person", roles: ["reviewer"], session: true },
  params: byId,
  body: decision,
  reply: { status: 200, schema: reinstatement },
  errors: [
    "reinstatement.not_found",
    "reinstatement.self_approval",
    "reinstatement.wrong_state",
    ...blockedErrors,
    "auth.password_wrong",
    "auth.code_wrong",
  ],
  handle: async (ctx, { params, body }) => {
    await decide(ctx, { ...body, id: params.id });
    return getReinstatementView(ctx, params.id);
  },
});

export const reinstatementCommands = [listReinstatements, askReinstatement, decideReinstatement];
