import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { publishFamily } from "../support/scenario/family-lot";
import { firstGolden } from "../support/scenario/golden";

let api: TestApi;
const { family, layout: source } = firstGolden();
const document = JSON.parse(source) as LayoutDocument;
const layout = "/families/MW-20/layouts/1.0.0";
const plain = { "content-type": "text/plain" };

beforeAll(async () => {
  api = await openTestApi();
  await publishFamily({ engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD }, family);
  await api.call("POST", "/families/MW-20/layouts", { as: "engineer", body: document });
});
afterAll(() => api.close());

const read = (query: Record<string, unknown> = {}, as: "engineer" | "engineer2" | "auditor" = "engineer") =>
  api.call("GET", `${layout}/text`, { as, query: query as never });
const keep = (draft: number, text: string, as: "engineer" | "engineer2") =>
  api.call("PUT", `${layout}/text`, { as, body: text, headers: plain, query: { draft } });

describe("GET …/layouts/{version}/text", () => {
  it("answers the text and who saved it, and not the text again to who has it", async () => {
    const { status, body } = await read();
    expect(status).toBe(200);
    expect(body).toEqual({
      state: "draft",
      draft: 1,
      unfinished: false,
      updatedAt: expect.any(String),
      updatedBy: "engineer",
      submittedAt: null,
      submittedBy: null,
      source: expect.any(String),
    });
    expect(JSON.parse(body.source)).toEqual(document);
    expect((await read({ draft: 1 })).body).toEqual({ ...body, source: null });
  });

  it("tells one editor what another saved, finished or not", async () => {
    const half = `${source}, and`;
    await keep(1, half, "engineer2");
    const { body } = await read({ draft: 1 });
    expect(body).toMatchObject({ draft: 2, unfinished: true, updatedBy: "engineer2", source: half });
    // Their save would be refused with the same text, so that both ways lead to one choice.
    const refused = await keep(1, source, "engineer");
    expect(refused.body).toMatchObject({
      code: "layout.draft_changed",
      now: body.draft,
      source: body.source,
      updatedBy: body.updatedBy,
      updatedAt: body.updatedAt,
    });
  });

  it("changes nothing, and needs no right to write", async () => {
    const before = await read();
    expect((await read({ draft: 1 }, "auditor")).status).toBe(200);
    expect((await read()).body).toEqual(before.body);
    expect((await read()).body.draft).toBe(2);
  });

  it("says who asked for publishing", async () => {
    await keep(2, source, "engineer2");
    await api.call("POST", `${layout}/submit`, { as: "engineer2" });
    expect((await read({ draft: 2 })).body).toMatchObject({
      state: "in-review",
      draft: 3,
      submittedBy: "engineer2",
      submittedAt: expect.any(String),
    });
  });

  it("is 401, 403, 404 and 422 as all of them", async () => {
    expect((await api.call("GET", `${layout}/text`)).status).toBe(401);
    expect((await api.call("GET", `${layout}/text`, { as: "operator" })).status).toBe(403);
    expect((await read({ draft: 0 })).status).toBe(422);
    const other = await api.call("GET", "/families/MW-20/layouts/9.0.0/text", { as: "engineer" });
    expect([other.status, other.body.code]).toEqual([404, "layout.not_found"]);
    const nobody = await api.call("GET", "/families/NONE/layouts/1.0.0/text", { as: "engineer" });
    expect([nobody.status, nobody.body.code]).toEqual([404, "family.not_found"]);
  });
});
