import { ROLES } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { changePassword as change } from "@/lib/services/account/change-password";
import { getAccount as get } from "@/lib/services/account/get-account";
import * as keys from "@/lib/services/account/keep-keys";
import * as sessions from "@/lib/services/account/keep-sessions";
import * as oneTime from "@/lib/services/account/one-time-enrolment";
import * as schema from "@/schemas/api/account";
import { byId, idPageQuery } from "@/schemas/api/common";
import { confirmation } from "@/schemas/api/people";

const self = { who: "person", roles: ROLES } as const;
const inBrowser = { ...self, session: true } as const;
const signing = ["auth.password_wrong", "auth.code_wrong", "auth.too_many_attempts"];
const done = async (work: Promise<void>) => {
  await work;
  return new Response(null, { status: 204 });
};

export const getAccount = command({
  id: "account.get",
  method: "GET",
  path: "/account",
  summary: "Who asks",
  access: self,
  reply: { status: 200, schema: schema.account },
  handle: (ctx) => get(ctx),
});

export const listKeys = command({
  id: "account.list-keys",
  method: "GET",
  path: "/account/keys",
  summary: "One's own access keys, newest first",
  access: self,
  query: idPageQuery,
  reply: { status: 200, schema: schema.accessKeyList },
  handle: (ctx, { query }) => keys.listKeys(ctx, query),
});

export const makeKey = command({
  id: "account.make-key",
  method: "POST",
  path: "/account/keys",
  summary: "Makes an access key for reading and engineer's work; it is shown this once",
  access: inBrowser,
  body: schema.newAccessKey,
  reply: { status: 201, schema: schema.madeAccessKey },
  errors: ["key.too_many", ...signing],
  handle: (ctx, { body }) => keys.makeKey(ctx, body),
});

export const revokeKey = command({
  id: "account.revoke-key",
  method: "DELETE",
  path: "/account/keys/{id}",
  summary: "Revokes one of one's own keys at once",
  access: inBrowser,
  params: byId,
  reply: { status: 204 },
  errors: ["key.not_found"],
  handle: (ctx, { params }) => done(keys.revokeKey(ctx, params.id)),
});

export const changePassword = command({
  id: "account.change-password",
  method: "PUT",
  path: "/account/password",
  summary: "Changes one's own password and ends one's other sessions",
  access: inBrowser,
  body: schema.passwordChange,
  reply: { status: 204 },
  errors: ["password.not_accepted", ...signing],
  handle: (ctx, { body }) => done(change(ctx, body)),
});

export const listSessions = command({
  id: "account.list-sessions",
  method: "GET",
  path: "/account/sessions",
  summary: "One's own browser sessions that last",
  access: self,
  query: idPageQuery,
  reply: { status: 200, schema: schema.sessionList },
  handle: (ctx, { query }) => sessions.listSessions(ctx, query),
});

export const endSession = command({
  id: "account.end-session",
  method: "DELETE",
  path: "/account/sessions/{id}",
  summary: "Ends one of one's own sessions at once",
  access: inBrowser,
  params: byId,
  reply: { status: 204 },
  errors: ["session.not_found"],
  handle: (ctx, { params }) => done(sessions.endSession(ctx, params.id)),
});

export const endOtherSessions = command({
  id: "account.end-other-sessions",
  method: "DELETE",
  path: "/account/sessions",
  summary: "Ends all of one's own sessions but the one that asks",
  access: inBrowser,
  reply: { status: 204 },
  handle: (ctx) => done(sessions.endOtherSessions(ctx)),
});

export const beginOneTimeCode = command({
  id: "account.begin-one-time-code",
  method: "POST",
  path: "/account/one-time-code",
  summary: "Begins to enrol one-time codes (RFC 6238): secret and QR code",
  access: inBrowser,
  body: schema.oneTimeStart,
  reply: { status: 201, schema: schema.oneTimeSecret },
  errors: ["one-time-code.exists", ...signing],
  handle: (ctx, { body }) => oneTime.beginOneTimeCode(ctx, body),
});

export const confirmOneTimeCode = command({
  id: "account.confirm-one-time-code",
  method: "POST",
  path: "/account/one-time-code/confirm",
  summary: "Ends enrolling with a code; from then on signing in and decisions ask for one",
  access: inBrowser,
  body: schema.oneTimeConfirm,
  reply: { status: 204 },
  errors: ["one-time-code.exists", "one-time-code.wrong_state", "auth.code_wrong", "auth.too_many_attempts"],
  handle: (ctx, { body }) => done(oneTime.confirmOneTimeCode(ctx, body.code)),
});

export const removeOneTimeCode = command({
  id: "account.remove-one-time-code",
  method: "POST",
  path: "/account/one-time-code/remove",
  summary: "Takes one's one-time codes away",
  access: inBrowser,
  body: confirmation,
  reply: { status: 204 },
  errors: ["one-time-code.wrong_state", ...signing],
  handle: (ctx, { body }) => done(oneTime.removeOneTimeCode(ctx, body)),
});

export const accountCommands = [
  getAccount,
  listKeys,
  makeKey,
  revokeKey,
  changePassword,
  listSessions,
  endSession,
  endOtherSessions,
  beginOneTimeCode,
  confirmOneTimeCode,
  removeOneTimeCode,
];
