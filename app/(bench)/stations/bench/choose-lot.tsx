import Link from "next/link";
import { MakerMark } from "@/app/_components/frame/maker-mark";
import { SealRosette } from "@/app/_components/seal-mark";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { sealOf } from "@/lib/domain/seal";
import type { BenchLot } from "@/lib/services/stations/get-bench";
import { LeaveBench } from "./leave-bench";

export interface ChooseLotProps {
  lots: readonly BenchLot[];
  person: string;
  /** Has no other page to go back to. */
  onlyOperator: boolean;
}

/** First screen of the bench: which lot is on it. */
export function ChooseLot({ lots, person, onlyOperator }: ChooseLotProps) {
  const ready = lots.filter((lot) => lot.live !== null);
  const stopped = lots.filter((lot) => lot.live === null);
  return (
    <main className="mx-auto flex w-full max-w-[1000px] flex-1 flex-col gap-5 px-4 py-5 md:px-8">
      <header className="flex flex-wrap items-center gap-x-4 gap-y-1">
        <MakerMark size={34} />
        <h1 className="text-[26px] md:text-[30px]">Which lot is on the bench?</h1>
        <div className="ml-auto">
          <LeaveBench person={person} onlyOperator={onlyOperator} />
        </div>
      </header>
      {ready.length === 0 ? (
        <p className="rounded border border-ochre bg-raised p-5">
          Nothing is live, so nothing may be written. When a release goes live, its lot stands here.
        </p>
      ) : (
        <ul className="flex flex-col gap-3">
          {ready.map(({ lot, family, live, held, sequence }) =>
            live ? (
              <li key={lot}>
                <Link
                  href={`/stations/bench?lot=${encodeURIComponent(lot)}&package=${live.package}`}
                  className="flex items-center gap-4 rounded border border-verdigris bg-raised px-4 py-4 text-ink no-underline hover:bg-tint hover:text-ink md:px-6"
                >
                  <SealRosette digest={live.digest} size={72} />
                  <span className="min-w-0 flex-1">
                    <span className="block font-mono text-[26px] leading-tight font-semibold wrap-anywhere">{lot}</span>
                    <span className="block text-ink-soft">
                      {family} · release {live.version} · sequence {sequence}
                    </span>
                    <span className="block font-semibold">{sealOf(live.digest).words.join(" ")}</span>
                    <span className="block text-ink-soft">
                      {formatNumberOf(live.devices, "device")}
                      {held > 0 ? `, ${held} held` : ""}
                    </span>
                  </span>
                </Link>
              </li>
            ) : null,
          )}
        </ul>
      )}
      {stopped.length > 0 ? (
        <section aria-labelledby="stopped">
          <h2 id="stopped" className="text-[22px]">
            Stopped
          </h2>
          <p className="text-ink-soft">
            Their release was withdrawn. Do not write: {stopped.map(({ lot }) => lot).join(", ")}.
          </p>
        </section>
      ) : null}
    </main>
  );
}
