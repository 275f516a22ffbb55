import { type MendContext, type Mender, partOf, readPart } from "@/builders/codec/mend/mend-context";
import type { ByteRange, LayoutChecksum } from "@/schemas/documents/layout";

type Ranged = LayoutChecksum & { over: ByteRange };

/** The checksum that a finding is about, where it covers one plain range. */
function checksumOf(path: string, context: MendContext): Ranged | undefined {
  const checksum = readPart<LayoutChecksum>(context, partOf(path));
  return checksum && isPlainRange(checksum.over) ? (checksum as Ranged) : undefined;
}

function isPlainRange(over: unknown): over is ByteRange {
  return Array.isArray(over) && over.length === 2 && over.every((end) => typeof end === "number");
}

/** The longest stretch of a range that keeps clear of the checksum's own place, of what is kept, and of the memory's end. */
export const shortenRange: Mender = (problem, context) => {
  const path = partOf(problem.path);
  const checksum = checksumOf(path, context);
  if (!checksum) return undefined;
  const barred = context.extents.filter((part) => part.path === path || part.kind === "kept");
  const [best] = stretchesOf(checksum.over, barred, context.layout.memory.bytes).sort(
    (a, b) => b[1] - b[0] - (a[1] - a[0]),
  );
  if (!best) return undefined;
  return { label: `Cover ${best[0]} to ${best[1]}`, edits: setRange(context, path, best) };
};

function stretchesOf(
  [from, to]: ByteRange,
  barred: readonly { at: number; end: number }[],
  bytes: number,
): ByteRange[] {
  const stretches: ByteRange[] = [];
  let next = from;
  const last = Math.min(to, bytes - 1);
  for (const part of [...barred].sort((a, b) => a.at - b.at)) {
    if (part.at > next) stretches.push([next, Math.min(part.at - 1, last)]);
    next = Math.max(next, part.end);
  }
  if (next <= last) stretches.push([next, last]);
  return stretches.filter(([a, b]) => a <= b);
}

const setRange = (context: MendContext, path: string, range: ByteRange) =>
  context.editor.set(path, "over", `[${range.join(", ")}]`);

export const swapEnds: Mender = (problem, context) => {
  const path = partOf(problem.path);
  if (/^\/(?:kept|reserved)\//.test(path)) {
    const range = readPart<ByteRange>(context, path);
    const [list, index] = [path.slice(0, path.lastIndexOf("/")), path.slice(path.lastIndexOf("/") + 1)];
    return range && { label: "Swap its ends", edits: context.editor.set(list, index, `[${range[1]}, ${range[0]}]`) };
  }
  const checksum = checksumOf(path, context);
  if (!checksum) return undefined;
  return { label: "Swap its ends", edits: setRange(context, path, [checksum.over[1], checksum.over[0]]) };
};

/** Puts the covered checksum before the one that covers it. */
export const computeEarlier: Mender = (problem, context) => {
  const at = Number(partOf(problem.path).split("/").at(-1));
  const covers = checksumOf(problem.path, context)?.over;
  const stored = context.extents.filter((part) => part.kind === "checksum");
  const later = context.layout.checksums.findIndex((_, i) => {
    const place = stored.find((part) => part.path === `/checksums/${i}`);
    return i > at && covers !== undefined && place !== undefined && place.at <= covers[1] && place.end > covers[0];
  });
  const name = context.layout.checksums[later]?.name;
  if (name === undefined) return undefined;
  return { label: `Compute “${name}” first`, edits: context.editor.move("/checksums", later, at) };
};

/** Widens the checksum that needs the fewest bytes more to cover a field. */
export const coverField: Mender = (problem, context) => {
  const field = context.extents.find((part) => part.path === partOf(problem.path));
  if (!field) return undefined;
  const choices = context.layout.checksums.flatMap((_, i) => {
    const path = `/checksums/${i}`;
    const checksum = checksumOf(path, context);
    if (!checksum) return [];
    const range: ByteRange = [Math.min(checksum.over[0], field.at), Math.max(checksum.over[1], field.end - 1)];
    const barred = context.extents.some(
      (part) =>
        (part.path === path || part.kind === "kept" || isLater(part.path, i)) &&
        part.at <= range[1] &&
        part.end > range[0],
    );
    const more = range[1] - range[0] - (checksum.over[1] - checksum.over[0]);
    return barred ? [] : [{ path, name: checksum.name, range, more }];
  });
  const best = choices.sort((a, b) => a.more - b.more)[0];
  if (!best) return undefined;
  return {
    label: `Let “${best.name}” cover ${best.range[0]} to ${best.range[1]}`,
    edits: setRange(context, best.path, best.range),
  };
};

const isLater = (path: string, index: number) =>
  /^\/checksums\/(\d+)$/.test(path) && Number(path.split("/")[2]) > index;

/** A 16-bit check in the memory's last two bytes, over all before them. */
export const addChecksum: Mender = (_problem, context) => {
  const { bytes } = context.layout.memory;
  const taken = context.extents.some((part) => part.end > bytes - 2 || part.kind === "kept");
  const names = new Set(context.layout.fields.map((field) => field.name));
  if (taken || bytes < 3 || names.has("imageCrc")) return undefined;
  const checksum = { name: "imageCrc", at: bytes - 2, algorithm: "CRC-16/IBM-3740", over: [0, bytes - 3] };
  return { label: `Add “imageCrc” at ${bytes - 2}`, edits: context.editor.insert("/checksums", checksum) };
};
