/** Global set-up of the projects with a database: a server and a migrated template, whoever started the run. */
import type { TestProject } from "vitest/node";
import { ensureTemplate } from "@/db/test-database";
import { CHECKOUT } from "@/lib/commands/checkout";
import { joinTestServer } from "@/lib/commands/test-server";
import { findTestServerUrl } from "@/lib/env";

declare module "vitest" {
  interface ProvidedContext {
    testServerUrl: string;
    testTemplate: string;
  }
}

export default async function setUp(project: TestProject): Promise<() => Promise<void>> {
  const given = findTestServerUrl();
  const server = given === undefined ? await joinTestServer() : { url: given, release: async () => undefined };
  try {
    project.provide("testServerUrl", server.url);
    project.provide("testTemplate", await ensureTemplate(server.url, CHECKOUT));
  } catch (error) {
    await server.release();
    throw error;
  }
  return () => server.release();
}
