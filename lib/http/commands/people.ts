import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { addPerson as add } from "@/lib/services/people/add-person";
import { askForLink } from "@/lib/services/people/ask-for-link";
import { changePerson as change } from "@/lib/services/people/change-person";
import * as decide from "@/lib/services/people/decide-role";
import * as read from "@/lib/services/people/list-people";
import { sendLink } from "@/lib/services/people/send-link";
import { choosePassword } from "@/lib/services/people/use-link";
import { byId, idPageQuery } from "@/schemas/api/common";
import * as schema from "@/schemas/api/people";

const admin = { who: "person", roles: ["admin"], session: true } as const;
const readers = { who: "person", roles: READERS } as const;
const signing = ["auth.password_wrong", "auth.code_wrong", "auth.too_many_attempts"];

export const listPeople = command({
  id: "people.list",
  method: "GET",
  path: "/people",
  summary: "People with their roles, and which roles too few can act in",
  access: readers,
  query: idPageQuery,
  reply: { status: 200, schema: schema.personList },
  handle: (ctx, { query }) => read.listPeople(ctx, query),
});

export const addPerson = command({
  id: "people.add",
  method: "POST",
  path: "/people",
  summary: "Adds a person, who gets a mailed link to choose a password",
  access: admin,
  body: schema.newPerson,
  reply: { status: 201, schema: schema.person },
  errors: ["person.exists", ...signing],
  handle: (ctx, { body }) => add(ctx, body),
});

export const getPerson = command({
  id: "people.get",
  method: "GET",
  path: "/people/{id}",
  summary: "A person",
  access: readers,
  params: byId,
  reply: { status: 200, schema: schema.person },
  errors: ["person.not_found"],
  handle: (ctx, { params }) => read.getPerson(ctx, params.id),
});

export const changePerson = command({
  id: "people.change",
  method: "PATCH",
  path: "/people/{id}",
  summary: "Changes name, roles or whether somebody is active; reviewer and admin wait for a second admin",
  access: admin,
  params: byId,
  body: schema.personChange,
  reply: { status: 200, schema: schema.person },
  errors: [
    "person.not_found",
    "person.own_roles",
    "person.own_account",
    "person.wrong_state",
    "person.exists",
    ...signing,
  ],
  handle: (ctx, { params, body }) => change(ctx, params.id, body),
});

export const confirmRole = command({
  id: "people.confirm-role",
  method: "POST",
  path: "/people/{id}/roles/{role}/confirm",
  summary: "Confirms a role that another admin asked for",
  access: admin,
  params: schema.byPersonRole,
  body: schema.confirmation,
  reply: { status: 200, schema: schema.person },
  errors: ["role.not_found", "person.second_admin_needed", "person.own_roles", "person.wrong_state", ...signing],
  handle: (ctx, { params, body }) => decide.confirmRole(ctx, { personId: params.id, role: params.role }, body),
});

export const refuseRole = command({
  id: "people.refuse-role",
  method: "POST",
  path: "/people/{id}/roles/{role}/refuse",
  summary: "Refuses a role that waits, or takes back what one asked for",
  access: admin,
  params: schema.byPersonRole,
  body: schema.refusal,
  reply: { status: 200, schema: schema.person },
  errors: ["role.not_found", "person.own_roles", ...signing],
  handle: (ctx, { params, body }) => decide.refuseRole(ctx, { personId: params.id, role: params.role }, body),
});

export const sendPersonLink = command({
  id: "people.send-link",
  method: "POST",
  path: "/people/{id}/link",
  summary: "Mails a new link to choose a password; using it also takes a lost one-time code away",
  access: admin,
  params: byId,
  body: schema.confirmation,
  reply: { status: 204 },
  errors: ["person.not_found", "person.own_account", "person.wrong_state", ...signing],
  handle: async (ctx, { params, body }) => {
    await sendLink(ctx, params.id, body);
    return new Response(null, { status: 204 });
  },
});

export const askForPasswordLink = command({
  id: "account.ask-for-link",
  method: "POST",
  path: "/account/links",
  summary: "Mails a link to choose a new password, if the address is known; the answer is the same if not",
  access: { who: "public" },
  body: schema.linkRequest,
  reply: { status: 204 },
  handle: async (ctx, { body }) => {
    await askForLink(ctx, body.email);
    return new Response(null, { status: 204 });
  },
});

export const usePasswordLink = command({
  id: "account.use-link",
  method: "POST",
  path: "/account/links/use",
  summary: "Chooses a password with a mailed link",
  access: { who: "public" },
  body: schema.linkUse,
  reply: { status: 200, schema: schema.linkUsed },
  errors: ["link.not_found", "link.used", "link.expired", "password.not_accepted", "person.exists"],
  handle: (ctx, { body }) => choosePassword(ctx, body),
});

export const peopleCommands = [
  listPeople,
  addPerson,
  getPerson,
  changePerson,
  confirmRole,
  refuseRole,
  sendPersonLink,
  askForPasswordLink,
  usePasswordLink,
];
