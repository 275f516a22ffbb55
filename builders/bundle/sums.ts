import { byCodeUnits } from "@/builders/bundle/manifest";
import { sha256Hex } from "@/builders/bundle/sha256";
import { AppError } from "@/lib/errors";

/** `SHA256SUMS` in the form that `sha256sum -c` reads: digest, two spaces, path, LF; by path. */
export function sumsText(files: ReadonlyMap<string, Uint8Array | string>): string {
  return sumsTextOf([...files].map(([path, content]) => ({ path, digest: sha256Hex(content) })));
}

/** As {@link sumsText}, from digests that are known already. */
export function sumsTextOf(files: readonly { path: string; digest: string }[]): string {
  const rising = [...files].sort((a, b) => byCodeUnits(a.path, b.path));
  return rising.map(({ path, digest }) => `${digest}  ${path}\n`).join("");
}

/** Digests by path. @throws AppError `bundle.sums_malformed` {line} for any other form, a path twice among them. */
export function readSums(text: string): Map<string, string> {
  const digests = new Map<string, string>();
  const lines = text.split("\n");
  if (lines.pop() !== "") throw malformed(lines.length + 1);
  lines.forEach((content, i) => {
    const [, digest, path] = /^([0-9a-f]{64}) {2}([A-Za-z0-9._/-]+)$/.exec(content) ?? [];
    if (digest === undefined || path === undefined || digests.has(path)) throw malformed(i + 1);
    digests.set(path, digest);
  });
  return digests;
}

function malformed(line: number): AppError {
  return new AppError("bundle.sums_malformed", {
    line,
    message: `SHA256SUMS: line ${line} is not a digest and a path`,
  });
}
