/** Finds the route file that Next would serve a path with, by the folders below `app/api`. */
import { existsSync, readdirSync } from "node:fs";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import type { RouteHandler } from "@/lib/http/route";

const APP = join(import.meta.dirname, "../../app");

export interface FoundRoute {
  file: string;
  params: Record<string, string | string[]>;
}

/** @param path below `/api/v1`, or from `/api/` on. @throws Error where no route file serves it */
export function findRoute(path: string): FoundRoute {
  const full = path.startsWith("/api/") ? path : `/api/v1${path}`;
  const segments = full.split("/").filter(Boolean).map(decodeURIComponent);
  const found = walk(APP, segments, {});
  if (found === undefined) throw new Error(`no route file serves ${full}`);
  return found;
}

/** Named folders go before parameters, as in Next. */
function walk(folder: string, segments: string[], params: FoundRoute["params"]): FoundRoute | undefined {
  const [segment, ...rest] = segments;
  if (segment === undefined) {
    const file = join(folder, "route.ts");
    return existsSync(file) ? { file, params } : undefined;
  }
  const folders = readdirSync(folder, { withFileTypes: true }).filter((entry) => entry.isDirectory());
  if (folders.some((entry) => entry.name === segment)) {
    const found = walk(join(folder, segment), rest, params);
    if (found) return found;
  }
  for (const { name } of folders) {
    const catchAll = /^\[\.\.\.(\w+)\]$/.exec(name)?.[1];
    if (catchAll) return walk(join(folder, name), [], { ...params, [catchAll]: segments });
    const parameter = /^\[(\w+)\]$/.exec(name)?.[1];
    const found = parameter && walk(join(folder, name), rest, { ...params, [parameter]: segment });
    if (found) return found;
  }
  return undefined;
}

/** Every route file below a folder of `app`, as URL paths with `{parameter}`. */
export function listRoutePaths(folder = "api/v1"): string[] {
  return readdirSync(join(APP, folder), { recursive: true, encoding: "utf8" })
    .filter((file) => file.endsWith("route.ts"))
    .map((file) => `/${file}`.replace(/\/route\.ts$/, "").replaceAll(/\[(\w+)\]/g, "{$1}"))
    .sort();
}

/** The methods that a route file exports, by name. */
export async function importRoute(file: string): Promise<Record<string, RouteHandler | undefined>> {
  return import(/* @vite-ignore */ pathToFileURL(file).href);
}

export function routeFileOf(path: string): string {
  return join(APP, "api/v1", path.replaceAll(/\{(\w+)\}/g, "[$1]"), "route.ts");
}
