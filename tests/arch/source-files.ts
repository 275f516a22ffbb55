/** The checkout's own TypeScript, read for the tests of its structure. */
import { existsSync, readdirSync, readFileSync, statSync } from "node:fs";
import { dirname, join, relative } from "node:path";
import { CHECKOUT } from "@/lib/commands/checkout";

export interface Import {
  /** Path of a file of ours relative to the checkout without extension, or a package's or Node module's name. */
  target: string;
  isOurs: boolean;
  /** Erased by the compiler. */
  typeOnly: boolean;
}

export interface SourceFile {
  path: string;
  /** Without comments. */
  code: string;
  imports: Import[];
}

const IGNORED = /^(node_modules|\.git|\.next.*|\.local.*)$/;
const EXTENSIONS = ["", ".ts", ".tsx", ".mjs", ".json", ".css", "/index.ts"];
const FROM = /\b(import|export)\s+(type\s+)?(?:[\w$*{}\s,]+?\s+from\s+)?["']([^"']+)["']/g;
const DYNAMIC = /\bimport\(\s*["']([^"']+)["']\s*\)/g;

/** Names of everything at the top of the checkout that is kept: what tools and starts put there is left out. */
export function listTopLevel(): string[] {
  const made = /^(next-env\.d\.ts|.*\.tsbuildinfo)$/;
  return readdirSync(CHECKOUT).filter((name) => !IGNORED.test(name) && !made.test(name));
}

/** Every .ts and .tsx file of ours, with its imports resolved. */
export function readSourceFiles(): SourceFile[] {
  return listTopLevel()
    .flatMap((name) => walk(name))
    .map(readSource);
}

function walk(path: string): string[] {
  if (statSync(join(CHECKOUT, path)).isFile()) return /\.tsx?$/.test(path) ? [path] : [];
  return readdirSync(join(CHECKOUT, path)).flatMap((name) => walk(join(path, name)));
}

function readSource(path: string): SourceFile {
  const code = stripComments(readFileSync(join(CHECKOUT, path), "utf8"));
  return { path, code, imports: findImports(code, path) };
}

/** Imports of a file's code. @param path of the file, for relative names. */
export function findImports(code: string, path: string): Import[] {
  const statements = [...code.matchAll(FROM)].map((match) => ({
    name: match[3] ?? "",
    typeOnly: match[2] !== undefined,
  }));
  const calls = [...code.matchAll(DYNAMIC)].map((match) => ({ name: match[1] ?? "", typeOnly: false }));
  return [...statements, ...calls].map(({ name, typeOnly }) => ({ ...resolve(name, path), typeOnly }));
}

/** Comments become blanks; `//` inside a string, as in an address, stays. */
export function stripComments(code: string): string {
  return code.replace(/("(?:\\.|[^"\\\n])*"|'(?:\\.|[^'\\\n])*'|`(?:\\.|[^`\\])*`)|\/\*[\s\S]*?\*\/|\/\/[^\n]*/g, "$1");
}

function resolve(name: string, from: string): { target: string; isOurs: boolean } {
  const path = name.startsWith("@/") ? name.slice(2) : name.startsWith(".") ? join(dirname(from), name) : undefined;
  if (path === undefined) return { target: name, isOurs: false };
  return { target: path, isOurs: true };
}

/** Whether an import of ours names a file that is there. */
export function isThere(target: string): boolean {
  const path = join(CHECKOUT, target);
  return EXTENSIONS.some((extension) => existsSync(path + extension) && statSync(path + extension).isFile());
}

/** Whether the path is the folder or file itself, or something in it. */
export function isWithin(path: string, area: string): boolean {
  return (
    path === area ||
    path.startsWith(`${area}/`) ||
    path.replace(/\.(tsx?|mjs|json)$/, "") === area ||
    relative(area, path) === ""
  );
}
