"use client";

import { useEffect, useState } from "react";

const storeKey = "trimwright.bench-sound";

/** A short tone for each answer: high to write, low to stop. Off until it is switched on, and remembered in this browser. */
export function DoneSound({ good, answered }: { good: boolean; answered: string }) {
  const [on, setOn] = useState(false);
  useEffect(() => setOn(localStorage.getItem(storeKey) === "on"), []);
  // biome-ignore lint/correctness/useExhaustiveDependencies: one tone an answer
  useEffect(() => {
    if (on) play(good);
  }, [answered]);

  const change = (next: boolean) => {
    setOn(next);
    localStorage.setItem(storeKey, next ? "on" : "off");
    if (next) play(good);
  };
  return (
    <label className="mx-auto mt-auto flex w-full max-w-[1000px] items-center gap-3 px-4 pb-5 text-ink-soft md:px-8">
      <input
        type="checkbox"
        checked={on}
        onChange={(event) => change(event.currentTarget.checked)}
        className="size-5 accent-copper"
      />
      Sound with each answer
    </label>
  );
}

function play(good: boolean): void {
  const audio = new AudioContext();
  const tone = audio.createOscillator();
  const volume = audio.createGain();
  tone.frequency.value = good ? 880 : 220;
  volume.gain.value = 0.15;
  tone.connect(volume).connect(audio.destination);
  tone.start();
  tone.stop(audio.currentTime + (good ? 0.12 : 0.5));
  tone.onended = () => void audio.close();
}
