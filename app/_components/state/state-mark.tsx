import { type Shape, type Tone, toneShape, toneText } from "@/app/_components/state/tone";

const drawings: Record<Shape, React.ReactNode> = {
  dot: <circle cx="6" cy="6" r="5" fill="currentColor" />,
  ring: <circle cx="6" cy="6" r="4.2" fill="none" stroke="currentColor" strokeWidth="1.7" />,
  half: (
    <>
      <circle cx="6" cy="6" r="4.2" fill="none" stroke="currentColor" strokeWidth="1.7" />
      <path d="M6 1.8a4.2 4.2 0 0 1 0 8.4z" fill="currentColor" />
    </>
  ),
  cross: <path d="M2 2l8 8M10 2l-8 8" stroke="currentColor" strokeWidth="2.2" />,
  bar: <path d="M1.5 6h9" stroke="currentColor" strokeWidth="3" />,
  square: <rect x="2" y="2" width="8" height="8" fill="none" stroke="currentColor" strokeWidth="1.7" />,
};

/** The shape alone, in the current text colour; always beside a word. */
export function ToneShape({ tone, shape, size = 12 }: { tone: Tone; shape?: Shape; size?: number }) {
  return (
    <svg width={size} height={size} viewBox="0 0 12 12" aria-hidden="true" className="flex-none">
      {drawings[shape ?? toneShape[tone]]}
    </svg>
  );
}

export interface StateMarkProps {
  tone: Tone;
  word: string;
  /** Only where the tone's own shape does not do, as the square of a draft. */
  shape?: Shape;
  /** One line for hover that says what the state means. */
  title?: string;
}

/** A state as shape, word and colour. `<StateMark {...stateOf("package", "live")} />` */
export function StateMark({ tone, word, shape, title }: StateMarkProps) {
  return (
    <span
      title={title}
      className={`inline-flex items-center gap-1.5 text-sm font-semibold whitespace-nowrap ${toneText[tone]}`}
    >
      <ToneShape tone={tone} shape={shape} />
      {word}
    </span>
  );
}
