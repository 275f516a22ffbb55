import { CopyButton } from "@/app/_components/copy-button";
import { groupDigest } from "@/lib/domain/format/digest";

export interface DigestProps {
  /** Lower-case hex. */
  value: string;
  /** Only the first digits, for table cells and notes; the whole on hover. */
  short?: boolean;
  /** Named in the copy button's label, as "package digest". */
  name?: string;
}

/** A digest in groups of eight, to be read aloud and copied whole. */
export function Digest({ value, short = false, name = "digest" }: DigestProps) {
  if (short) {
    return (
      <span title={value} className="font-mono text-xs">
        {value.slice(0, 12)}…
      </span>
    );
  }
  return (
    <span className="inline-flex items-start gap-1.5">
      <span className="font-mono text-xs leading-[1.4] wrap-anywhere text-ink-soft">
        {groupDigest(value).join(" ")}
      </span>
      <CopyButton text={value} name={name} />
    </span>
  );
}
