import { Digest } from "@/app/_components/digest";
import { sealOf, sealPaths } from "@/lib/domain/seal";

const titles = "The seal of these bytes: compare the rosette and the four words on screen, in print and at the station";

/** The rosette alone; its text alternative is the four words. */
export function SealRosette({ digest, size = 92 }: { digest: string; size?: number }) {
  const seal = sealOf(digest);
  const shapes = sealPaths(seal, size);
  const stroke = Math.max(1, size * 0.0155);
  return (
    <svg
      width={size}
      height={size}
      viewBox={`0 0 ${size} ${size}`}
      role="img"
      aria-label={`Seal: ${seal.words.join(" ")}`}
      fill="none"
      stroke="currentColor"
      strokeWidth={stroke}
      className="flex-none text-verdigris"
    >
      {shapes.petals.map(({ outline, ring, filled }) => (
        <g key={outline}>
          <path d={outline} fill={filled ? "currentColor" : "none"} />
          {ring ? <path d={ring} className={filled ? "stroke-raised" : ""} /> : null}
        </g>
      ))}
      <circle cx={shapes.centre.x} cy={shapes.centre.y} r={shapes.centre.ringRadius} />
      <circle cx={shapes.centre.x} cy={shapes.centre.y} r={shapes.centre.dotRadius} fill="currentColor" />
    </svg>
  );
}

export interface SealMarkProps {
  /** Package digest, 64 hex digits. */
  digest: string;
  /** inline: rosette and words on one line, for title rows and tables; full: with the digest. */
  look?: "inline" | "full";
  /** Over the words, as "Release 1.2.0". */
  above?: React.ReactNode;
  /** Under the words instead of the digest. */
  below?: React.ReactNode;
}

/** Seal of a package: rosette, four words and the digest they are drawn from. */
export function SealMark({ digest, look = "full", above, below }: SealMarkProps) {
  const words = sealOf(digest).words.join(" ");
  if (look === "inline") {
    return (
      <span title={titles} className="inline-flex items-center gap-2 text-sm font-semibold whitespace-nowrap">
        <SealRosette digest={digest} size={26} />
        <span aria-hidden="true">{words}</span>
      </span>
    );
  }
  return (
    <div title={titles} className="flex items-center gap-4">
      <SealRosette digest={digest} />
      <div className="min-w-0">
        {above ? <div className="text-sm text-ink-soft">{above}</div> : null}
        <div className="text-md leading-tight font-[650]">{words}</div>
        <div className="mt-1 text-sm text-ink-soft">{below ?? <Digest value={digest} name="package digest" />}</div>
      </div>
    </div>
  );
}
