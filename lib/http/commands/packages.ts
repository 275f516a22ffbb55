import { READERS } from "@/lib/domain/roles";
import { decidePackage as decide } from "@/lib/services/packages/decide-package";
import { cancelBuild } from "@/lib/services/packages/end-build";
import { getPackageView, listLotPackages } from "@/lib/services/packages/get-package";
import { releasePackage as release, withdrawPackage as withdraw } from "@/lib/services/packages/release-package";
import { startBuild } from "@/lib/services/packages/start-build";
import { submitPackage as submit, takeBackPackage as takeBack } from "@/lib/services/packages/submit-package";
import { waiveCheck } from "@/lib/services/packages/waive-check";
import { byCodeOrId, byId, idPageQuery } from "@/schemas/api/common";
import {
  liveChange,
  newPackage,
  packageDecision,
  packagePage,
  packageView,
  startedPackage,
  waiverBody,
} from "@/schemas/api/packages";
import { command } from "../command";

const readers = { who: "person", roles: READERS } as const;
const engineer = { who: "person", roles: ["engineer"] } as const;
const reviewerSigned = { who: "person", roles: ["reviewer"], session: true } as const;
const eitherSigned = { who: "person", roles: ["engineer", "reviewer"], session: true } as const;
const signedErrors = ["auth.password_wrong", "auth.code_wrong"] as const;

export const listPackages = command({
  id: "packages.list",
  method: "GET",
  path: "/lots/{code}/packages",
  summary: "Packages of a lot, newest first",
  access: readers,
  params: byCodeOrId,
  query: idPageQuery,
  reply: { status: 200, schema: packagePage },
  errors: ["lot.not_found"],
  handle: (ctx, { params, query }) => listLotPackages(ctx, params.code, query),
});

export const buildPackage = command({
  id: "packages.build",
  method: "POST",
  path: "/lots/{code}/packages",
  summary: "Build a package of a lot's approved coefficients; the build goes on after the answer",
  access: engineer,
  params: byCodeOrId,
  body: newPackage,
  reply: { status: 202, schema: startedPackage },
  errors: [
    "lot.not_found",
    "layout.not_found",
    "layout.not_published",
    "layout.firmware_mismatch",
    "package.nothing_approved",
  ],
  idempotent: true,
  handle: (ctx, { params, body }) => startBuild(ctx, { ...body, lot: params.code }),
});

export const getPackage = command({
  id: "packages.get",
  method: "GET",
  path: "/packages/{id}",
  summary: "A package with its checks, waivers, makers and decisions",
  access: readers,
  params: byId,
  reply: { status: 200, schema: packageView },
  errors: ["package.not_found"],
  handle: (ctx, { params }) => getPackageView(ctx, params.id),
});

export const cancelPackageBuild = command({
  id: "packages.cancel",
  method: "POST",
  path: "/packages/{id}/cancel",
  summary: "Stop a build that is not wanted any more; the package ends as failed and its number is passed over",
  access: engineer,
  params: byId,
  reply: { status: 200, schema: packageView },
  errors: ["package.not_found", "package.wrong_state"],
  handle: async (ctx, { params }) => {
    await cancelBuild(ctx, params);
    return getPackageView(ctx, params.id);
  },
});

export const waivePackageCheck = command({
  id: "packages.waive",
  method: "POST",
  path: "/packages/{id}/waivers",
  summary: "Accept the warning of a check with a reason, before the package is submitted",
  access: reviewerSigned,
  params: byId,
  body: waiverBody,
  reply: { status: 201, schema: packageView },
  errors: [
    "package.not_found",
    "package.self_approval",
    "package.wrong_state",
    "check.not_found",
    "check.not_waivable",
    "waiver.exists",
    ...signedErrors,
  ],
  handle: async (ctx, { params, body }) => {
    await waiveCheck(ctx, { ...body, id: params.id });
    return getPackageView(ctx, params.id);
  },
});

export const submitPackage = command({
  id: "packages.submit",
  method: "POST",
  path: "/packages/{id}/submit",
  summary: "Ask a second person to decide over a draft",
  access: engineer,
  params: byId,
  reply: { status: 200, schema: packageView },
  errors: [
    "package.not_found",
    "package.wrong_state",
    "package.check_failed",
    "package.not_waived",
    "package.sets_lapsed",
  ],
  handle: async (ctx, { params }) => {
    await submit(ctx, params);
    return getPackageView(ctx, params.id);
  },
});

export const takeBackPackage = command({
  id: "packages.take-back",
  method: "POST",
  path: "/packages/{id}/take-back",
  summary: "Make a package in review, or approved and not live, a draft again",
  access: engineer,
  params: byId,
  reply: { status: 200, schema: packageView },
  errors: ["package.not_found", "package.wrong_state"],
  handle: async (ctx, { params }) => {
    await takeBack(ctx, params);
    return getPackageView(ctx, params.id);
  },
});

export const decidePackage = command({
  id: "packages.decide",
  method: "POST",
  path: "/packages/{id}/decisions",
  summary: "Approve or refuse a package in review, naming what was looked at",
  access: reviewerSigned,
  params: byId,
  body: packageDecision,
  reply: { status: 200, schema: packageView },
  errors: [
    "package.not_found",
    "package.self_approval",
    "package.wrong_state",
    "package.changed",
    "package.sets_lapsed",
    ...signedErrors,
  ],
  handle: async (ctx, { params, body }) => {
    await decide(ctx, { ...body, id: params.id });
    return getPackageView(ctx, params.id);
  },
});

export const releasePackage = command({
  id: "packages.release",
  method: "POST",
  path: "/packages/{id}/release",
  summary: "Make an approved package live for its lot",
  access: eitherSigned,
  params: byId,
  body: liveChange,
  reply: { status: 200, schema: packageView },
  errors: ["package.not_found", "package.wrong_state", "package.live_changed", "package.sets_lapsed", ...signedErrors],
  handle: async (ctx, { params, body }) => {
    await release(ctx, { ...body, id: params.id });
    return getPackageView(ctx, params.id);
  },
});

export const withdrawPackage = command({
  id: "packages.withdraw",
  method: "POST",
  path: "/packages/{id}/withdraw",
  summary: "Stop the live package at once",
  access: eitherSigned,
  params: byId,
  body: liveChange,
  reply: { status: 200, schema: packageView },
  errors: ["package.not_found", "package.wrong_state", ...signedErrors],
  handle: async (ctx, { params, body }) => {
    await withdraw(ctx, { ...body, id: params.id });
    return getPackageView(ctx, params.id);
  },
});

export const packageCommands = [
  listPackages,
  buildPackage,
  getPackage,
  cancelPackageBuild,
  waivePackageCheck,
  submitPackage,
  takeBackPackage,
  decidePackage,
  releasePackage,
  withdrawPackage,
];
