import { Button } from "@/app/_components/button";

export type Step = "reading" | "checking" | "sending" | "storing";

const NAMES: Record<Step, string> = {
  reading: "Reading the file",
  checking: "Checking the rows in this browser",
  sending: "Sending",
  storing: "The server checks and stores",
};

export interface UploadStepsProps {
  step: Step;
  /** 0 to 1; undefined where nothing tells. */
  share?: number;
  onStop: () => void;
}

/** How far an upload is, with a way to stop it. */
export function UploadSteps({ step, share, onStop }: UploadStepsProps) {
  const percent = share === undefined ? undefined : Math.floor(Math.min(1, share) * 100);
  return (
    <div className="flex items-end gap-4">
      <div className="min-w-0 flex-1">
        <div className="mb-1 flex items-baseline gap-3 text-sm">
          <span className="font-semibold" role="status">
            {NAMES[step]}
          </span>
          <span className="ml-auto font-mono text-ink-soft">{percent === undefined ? "a moment" : `${percent} %`}</span>
        </div>
        <div
          role="progressbar"
          aria-label={NAMES[step]}
          aria-valuemin={0}
          aria-valuemax={100}
          aria-valuenow={percent}
          className="h-2 overflow-hidden rounded border border-rule bg-sunk"
        >
          <div
            className={`h-full bg-copper ${percent === undefined ? "w-full animate-pulse" : "transition-[width]"}`}
            style={percent === undefined ? undefined : { width: `${percent}%` }}
          />
        </div>
      </div>
      <Button onClick={onStop}>Stop</Button>
    </div>
  );
}
