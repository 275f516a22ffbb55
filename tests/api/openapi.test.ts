import { Ajv2020 } from "ajv/dist/2020";
import addFormats from "ajv-formats";
import { beforeAll, describe, expect, it } from "vitest";
import type { AnyCommand } from "@/lib/http/command";
import { isUpload } from "@/lib/http/command";
import { commands } from "@/lib/http/registry";
import { openTestApi, type TestApi } from "../support/api";
import { importRoute, listRoutePaths, routeFileOf } from "../support/route-files";
import { CONTRACT_CALLS, CONTRACT_LISTS } from "./contract-calls";

type Json = Record<string, unknown>;
interface Operation {
  operationId: string;
  parameters?: ({ name: string; in: string; required?: boolean } & { $ref?: string })[];
  security: Record<string, unknown>[];
  requestBody?: { required: boolean; content: Record<string, { schema: unknown }> };
  responses: Record<string, Json>;
}

let api: TestApi;
let document: Json & {
  paths: Record<string, Record<string, Operation>>;
  components: Record<string, Record<string, Json>>;
};
beforeAll(async () => {
  api = await openTestApi();
  const reply = await api.call("GET", "/openapi.json");
  expect(reply.status).toBe(200);
  document = reply.body;
});

function operationOf({ method, path }: { method: string; path: string }): Operation | undefined {
  return document.paths[path]?.[method.toLowerCase()];
}

function operations(): [string, Operation][] {
  return Object.entries(document.paths).flatMap(([path, item]) =>
    Object.entries(item)
      .filter(([key]) => key !== "servers")
      .map(([method, operation]): [string, Operation] => [`${method.toUpperCase()} ${path}`, operation]),
  );
}

/** What a JSON pointer of the document leads to. */
function resolve(ref: string): unknown {
  const steps = ref.replace(/^#\//, "").split("/");
  return steps.reduce<unknown>((at, step) => (at as Json)[step.replaceAll("~1", "/").replaceAll("~0", "~")], document);
}

function everyRef(value: unknown): string[] {
  if (typeof value !== "object" || value === null) return [];
  const own = "$ref" in value && typeof value.$ref === "string" ? [value.$ref] : [];
  return [...own, ...Object.values(value).flatMap(everyRef)];
}

function successOf(operation: Operation, command: AnyCommand): { content?: Record<string, { schema?: unknown }> } {
  return operation.responses[String(command.reply.status)] ?? {};
}

const contractCalls = CONTRACT_CALLS.trim()
  .split("\n")
  .map((line) => {
    const [method = "", path = "", status = "", ...query] = line.split(" ");
    return { line, method, path, status, query };
  });

describe("the routes", () => {
  it("belong each to a command of the same path, and each command has its route", () => {
    expect(listRoutePaths()).toEqual([...new Set(commands.map(({ path }) => path))].sort());
  });

  it("export the methods of their commands and no other", async () => {
    for (const path of listRoutePaths()) {
      const expected = commands.filter((command) => command.path === path).map(({ method }) => method);
      expect(Object.keys(await importRoute(routeFileOf(path))).sort(), path).toEqual(expected.sort());
    }
  });
});

describe("the contract's table", () => {
  it.each(contractCalls)("has $line", ({ method, path, status, query }) => {
    const operation = operationOf({ method, path });
    expect(operation).toBeDefined();
    if (status !== "-") expect(Object.keys(operation?.responses ?? {})).toContain(status);
    const names = operation?.parameters?.filter((one) => one.in === "query").map(({ name }) => name);
    expect(names ?? []).toEqual(expect.arrayContaining(query));
  });

  it.each(CONTRACT_LISTS.trim().split(/\s+/))("pages %s by limit and cursor", (path) => {
    const operation = operationOf({ method: "GET", path }) as Operation;
    const names = operation.parameters?.filter((one) => one.in === "query").map(({ name }) => name);
    expect(names).toEqual(expect.arrayContaining(["limit", "cursor"]));
    const { content } = operation.responses["200"] as { content: Record<string, { schema: { $ref: string } }> };
    const page = resolve(content["application/json"]?.schema.$ref ?? "") as { properties: Json };
    expect(Object.keys(page.properties)).toEqual(expect.arrayContaining(["items", "next"]));
  });
});

// OpenAPI Specification 3.1.1, sections 4.8.1 (document), 4.8.9 (paths), 4.8.10 (operation), 4.8.12 (parameter), 4.8.24 (schema).
describe("the document, after OpenAPI 3.1", () => {
  it("says its version, title and where it is served, and describes everything once", () => {
    expect(document).toMatchObject({ openapi: "3.1.1", info: { title: "Trimwright" }, servers: [{ url: "/api/v1" }] });
    const ids = operations().map(([, { operationId }]) => operationId);
    expect(new Set(ids).size).toBe(ids.length);
    expect(ids).toHaveLength(commands.length + 1);
  });

  it("declares every parameter of a path, required, and none besides", () => {
    for (const [name, { parameters = [] }] of operations()) {
      const inPath = [...name.matchAll(/\{(\w+)\}/g)].map(([, one]) => one).sort();
      const declared = parameters.filter((one) => one.in === "path");
      expect(declared.map((one) => one.name).sort(), name).toEqual(inPath);
      for (const one of declared) expect(one.required, name).toBe(true);
    }
  });

  it("leads every reference somewhere, and every security name to a scheme", () => {
    for (const ref of new Set(everyRef(document))) expect(resolve(ref), ref).toBeDefined();
    const schemes = Object.keys(document.components.securitySchemes ?? {});
    for (const [name, { security }] of operations())
      for (const one of security.flatMap(Object.keys)) expect(schemes, name).toContain(one);
  });

  it("has schemas that JSON Schema 2020-12 takes", () => {
    const ajv = addFormats(new Ajv2020({ strict: false, allErrors: true }));
    ajv.addSchema(document, "api");
    for (const name of Object.keys(document.components.schemas ?? {}))
      expect(() => ajv.getSchema(`api#/components/schemas/${name}`), name).not.toThrow();
    for (const [name, { requestBody }] of operations())
      for (const { schema } of Object.values(requestBody?.content ?? {}))
        expect(ajv.validateSchema(schema as Json), name).toBe(true);
  });
});

describe("every operation", () => {
  const each = () => commands.map((command) => ({ command, operation: operationOf(command) as Operation }));

  it("has a schema for its JSON reply, and another media type where it answers bytes", () => {
    for (const { command, operation } of each()) {
      const { content = {} } = successOf(operation, command);
      if (command.reply.status === 204) expect(content, command.id).toEqual({});
      else expect(Object.keys(content).length, command.id).toBeGreaterThan(0);
      if (command.reply.schema) expect(content["application/json"]?.schema, command.id).toHaveProperty("$ref");
    }
  });

  it("tells its refusals with their codes as problem details", () => {
    for (const { command, operation } of each()) {
      const refusals = Object.entries(operation.responses).filter(([status]) => Number(status) >= 400);
      const text = JSON.stringify(refusals.map(([, one]) => resolve(String(one.$ref))));
      for (const code of command.errors ?? []) expect(text, command.id).toContain(`"${code}"`);
      if (command.access.who !== "public")
        expect(Object.keys(operation.responses)).toEqual(expect.arrayContaining(["401", "403"]));
      for (const [, one] of refusals)
        expect(Object.keys((resolve(String(one.$ref)) as { content: Json }).content)).toEqual([
          "application/problem+json",
        ]);
    }
  });

  it("tells which credential it takes", () => {
    const names = (id: string) => {
      const command = commands.find((one) => one.id === id) as AnyCommand;
      return operationOf(command)?.security.flatMap(Object.keys);
    };
    expect(names("signing-keys.list")).toEqual([]);
    expect(names("station.live")).toEqual(["stationKey"]);
    expect(names("lots.list")).toEqual(["session", "accessKey"]);
    expect(names("packages.release")).toEqual(["session"]);
  });

  it("describes its body, uploads with their media types and bounds", () => {
    for (const { command, operation } of each()) {
      const types = isUpload(command.body)
        ? command.body.upload.contentTypes
        : command.body
          ? ["application/json"]
          : [];
      expect(Object.keys(operation.requestBody?.content ?? {}), command.id).toEqual([...types]);
      const key = operation.parameters?.some((one) => one.$ref === "#/components/parameters/IdempotencyKey") ?? false;
      expect(key, command.id).toBe(command.idempotent === true);
    }
    const runs = operationOf({ method: "POST", path: "/lots/{code}/runs" });
    expect(runs?.requestBody).toMatchObject({
      required: true,
      content: { "text/csv": { schema: { type: "string" } } },
    });
  });
});

describe("what the API answers", () => {
  it("is what the document says: a list, a thing and a refusal", async () => {
    const ajv = addFormats(new Ajv2020({ strict: false, allErrors: true }));
    ajv.addSchema(document, "api");
    const body = {
      code: "TS-01",
      kind: "sensor",
      certificate: "C-1",
      calibratedUntil: "2031-01-31",
      uncertainty: 0.05,
    };
    const added = await api.call("POST", "/equipment", { as: "engineer", body });
    expect(added.status).toBe(201);
    const list = await api.call("GET", "/equipment", { as: "auditor" });
    const refused = await api.call("POST", "/equipment", { as: "engineer", body: {} });
    expect(refused.status).toBe(422);
    for (const [name, value] of [
      ["EquipmentAddReply", added.body],
      ["EquipmentListReply", list.body],
      ["Problem", refused.body],
    ] as const) {
      const validate = ajv.getSchema(`api#/components/schemas/${name}`);
      expect(validate?.(value), JSON.stringify(validate?.errors)).toBe(true);
    }
  });
});
