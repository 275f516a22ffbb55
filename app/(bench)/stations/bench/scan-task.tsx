import Link from "next/link";
import { SealRosette } from "@/app/_components/seal-mark";
import { ToneShape } from "@/app/_components/state/state-mark";
import { groupDigest } from "@/lib/domain/format/digest";
import { formatCount } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import { sealOf } from "@/lib/domain/seal";
import type { BenchAnswer, BenchLot } from "@/lib/services/stations/get-bench";
import { DoneSound } from "./done-sound";
import { ScanField } from "./scan-field";
import { type Verdict, verdictOf } from "./verdicts";

export interface ScanTaskProps {
  lot: BenchLot;
  /** Package chosen at the start. */
  chosen: string;
  answer: BenchAnswer | null;
  /** When this was asked. */
  at: string;
}

const bands: Record<Verdict["tone"], string> = {
  good: "border-verdigris bg-verdigris text-raised",
  bad: "border-oxide bg-oxide text-raised",
  caution: "border-ochre bg-ochre text-raised",
  info: "border-slate bg-slate text-raised",
};

/** Second screen of the bench: what is written, the scan, and the answer across the whole width. */
export function ScanTask({ lot, chosen, answer, at }: ScanTaskProps) {
  const changed = lot.live === null || lot.live.package !== chosen;
  const verdict = answer ? verdictOf(answer, lot) : null;
  return (
    <main className="flex flex-1 flex-col">
      <header className="flex flex-wrap items-center gap-x-5 gap-y-2 border-b border-rule bg-raised px-4 py-3 md:px-8">
        {lot.live ? <SealRosette digest={lot.live.digest} size={64} /> : null}
        <div className="min-w-0 flex-1 basis-[230px]">
          <h1 className="font-mono text-[24px] leading-tight font-semibold wrap-anywhere">{lot.lot}</h1>
          {lot.live ? (
            <>
              <p className="font-semibold">{sealOf(lot.live.digest).words.join(" ")}</p>
              <p className="text-ink-soft">
                {lot.family} · release {lot.live.version} · sequence {lot.sequence} · {formatCount(lot.live.devices)}{" "}
                devices
              </p>
            </>
          ) : (
            <p className="font-semibold text-oxide">nothing is live</p>
          )}
        </div>
        <Link
          href="/stations/bench"
          className="rounded border border-rule px-4 py-2 text-ink-soft no-underline hover:border-copper hover:text-ink"
        >
          Another lot
        </Link>
      </header>
      {changed && answer?.verdict !== "live-changed" && answer?.verdict !== "nothing-live" ? (
        <StopBand live={lot.live !== null} />
      ) : null}
      <div className="mx-auto w-full max-w-[1000px] px-4 pt-5 md:px-8">
        <ScanField lot={lot.lot} chosen={chosen} answered={answer ? `${answer.serial} ${at}` : ""} />
      </div>
      <div role="status" aria-live="assertive" className="mt-5 flex flex-1 flex-col">
        {answer && verdict ? (
          <>
            <div className={`flex items-center gap-5 border-y px-4 py-5 md:px-8 md:py-7 ${bands[verdict.tone]}`}>
              <ToneShape tone={verdict.tone} size={56} />
              <div className="min-w-0">
                <p className="font-mono text-[22px] wrap-anywhere">{answer.serial}</p>
                <p className="text-[30px] leading-tight font-bold md:text-[44px]">{verdict.word}</p>
              </div>
            </div>
            <AnswerFacts answer={answer} text={verdict.text} at={at} />
            <DoneSound good={verdict.tone === "good"} answered={`${answer.serial} ${at}`} />
          </>
        ) : (
          <p className="mx-auto w-full max-w-[1000px] px-4 text-ink-soft md:px-8">
            Compare the seal above with the one on the station, then scan the first device.
          </p>
        )}
      </div>
    </main>
  );
}

function StopBand({ live }: { live: boolean }) {
  return (
    <div role="alert" className={`flex items-center gap-4 border-y px-4 py-4 md:px-8 ${bands.bad}`}>
      <ToneShape tone="bad" size={40} />
      <p className="font-bold">
        {live
          ? "Stop: another release is live now. Choose the lot again and compare the seal."
          : "Stop: the release was withdrawn. Nothing may be written."}
      </p>
    </div>
  );
}

function AnswerFacts({ answer, text, at }: { answer: BenchAnswer; text: string; at: string }) {
  const { carries, imageSha256 } = answer;
  return (
    <div className="mx-auto flex w-full max-w-[1000px] flex-col gap-4 px-4 py-5 md:px-8">
      <p>{text}</p>
      <dl className="grid gap-x-8 gap-y-3 md:grid-cols-2">
        {imageSha256 ? (
          <div className="min-w-0">
            <dt className="text-ink-soft">Image, sha256</dt>
            <dd className="font-mono text-[22px] leading-snug wrap-anywhere">
              {groupDigest(imageSha256.slice(0, 16)).join(" ")}
              <span className="block leading-snug text-ink-soft">{groupDigest(imageSha256.slice(16)).join(" ")}</span>
            </dd>
          </div>
        ) : null}
        {answer.verdict === "unknown-serial" ? null : (
          <div className="min-w-0">
            <dt className="text-ink-soft">It carries, by record</dt>
            <dd>{carriesText(carries)}</dd>
          </div>
        )}
      </dl>
      <p className="text-ink-soft">
        Answered {formatDateTime(at)}. EEPROM cells wear: leave bytes alone that already match. A reply here does not
        replace the station's own comparison of serial, board and bytes.
      </p>
    </div>
  );
}

function carriesText(carries: BenchAnswer["carries"]): string {
  if (!carries) return "nothing: never written";
  const where = `${formatDateTime(carries.at)}, ${carries.station}`;
  if (!carries.known) return `unknown since ${where}`;
  return `${carries.version ?? "an unknown image"}${carries.live ? ", the live one" : ""}, ${where}`;
}
