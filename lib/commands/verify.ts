/**
 * `npm run verify -- bundle.zip [--key key-id-or-file.pem]`: checks a bundle offline, a zip or the folder that it was unpacked
 * into, and prints each step. Ends with 1 where one does not hold.
 */
import { readdirSync, readFileSync, statSync } from "node:fs";
import { join, relative, resolve } from "node:path";
import { parseArgs } from "node:util";
import { keyIdOf } from "@/builders/bundle/release";
import {
  type VerifyOptions,
  type VerifyResult,
  verifyBundle,
  verifyBundleFiles,
} from "@/builders/bundle/verify-bundle";
import { callerFolder } from "@/lib/env";
import { AppError } from "@/lib/errors";

const USAGE = "Usage: npm run verify -- bundle.zip [--key key-id-or-file.pem]";
const KEY_ID = /^[0-9a-f]{16}$/;

export default async function verify(args: string[]): Promise<number> {
  const { path, keys } = readArguments(args);
  const options: VerifyOptions = keys.length > 0 ? { trustedKeys: keys.map(trustedKey) } : {};
  const result = verifyPath(resolve(callerFolder(), path), options);
  for (const step of result.steps)
    console.log(`${step.ok ? "ok     " : "REFUSED"}  ${step.name.padEnd(9)}  ${step.message}`);
  console.log(result.ok ? "Verified." : "Not verified: write no device from this bundle.");
  return result.ok ? 0 : 1;
}

/** @throws AppError `command.usage` */
function readArguments(args: string[]): { path: string; keys: string[] } {
  try {
    const { positionals, values } = parseArgs({
      args,
      allowPositionals: true,
      options: { key: { type: "string", multiple: true } },
    });
    const [path, ...more] = positionals;
    if (path !== undefined && more.length === 0) return { path, keys: values.key ?? [] };
  } catch (cause) {
    throw new AppError("command.usage", { message: USAGE }, { cause });
  }
  throw new AppError("command.usage", { message: USAGE });
}

function trustedKey(given: string): { keyId: string; pem?: string } {
  if (KEY_ID.test(given)) return { keyId: given };
  const pem = readFileSync(resolve(callerFolder(), given), "utf8");
  return { keyId: keyIdOf(pem), pem };
}

/** @throws AppError `bundle.not_there`, `bundle.not_plain` */
function verifyPath(path: string, options: VerifyOptions): VerifyResult {
  const found = statSync(path, { throwIfNoEntry: false });
  if (!found) throw new AppError("bundle.not_there", { message: `There is no file ${path}` });
  if (!found.isDirectory()) return verifyBundle(readFileSync(path), options);
  const entries = readdirSync(path, { recursive: true, withFileTypes: true }).filter((entry) => !entry.isDirectory());
  const strange = entries.find((entry) => !entry.isFile());
  if (strange) {
    const message = `${strange.name} is no plain file (a link, perhaps); a bundle has plain files only`;
    throw new AppError("bundle.not_plain", { message });
  }
  const files = entries.map((entry) => join(entry.parentPath ?? entry.path, entry.name));
  return verifyBundleFiles(new Map(files.map((file) => [relative(path, file), readFileSync(file)])), options);
}
