import { formatCount, formatFigure } from "@/lib/domain/format/figure";

/** A size in bytes as people read it, in powers of 1,000 (SI): "128 bytes", "12.4 kB", "1.25 MB". */
export function formatSize(bytes: number): string {
  if (bytes === 1) return "1 byte";
  if (bytes < 1_000) return `${formatCount(bytes)} bytes`;
  if (bytes < 999_950) return `${formatFigure(bytes / 1_000, { digits: 1 })} kB`;
  if (bytes < 999_995_000) return `${formatFigure(bytes / 1e6, { digits: 2 })} MB`;
  return `${formatFigure(bytes / 1e9, { digits: 2 })} GB`;
}
