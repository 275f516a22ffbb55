import type { Tone } from "@/app/_components/state/tone";
import type { BenchAnswer, BenchLot } from "@/lib/services/stations/get-bench";

export interface Verdict {
  tone: Extract<Tone, "good" | "bad" | "caution" | "info">;
  /** The band's few words, read from two steps away. */
  word: string;
  /** What to do, in a sentence. */
  text: string;
}

/** What the band says about a scan. */
export function verdictOf(answer: BenchAnswer, lot: BenchLot): Verdict {
  const stop = (word: string, text: string): Verdict => ({ tone: "bad", word, text });
  switch (answer.verdict) {
    case "write":
      return {
        tone: "good",
        word: "Write this image",
        text: answer.hardwareId
          ? `Compare the board first: it has to read ${answer.hardwareId}.`
          : "Compare the serial in its memory, if there is one, before writing. Read back afterwards.",
      };
    case "carries-already":
      return {
        tone: "info",
        word: "Carries it already",
        text: "By record it holds these values and was read back equal. Do not write it again: EEPROM cells wear with every write.",
      };
    case "held":
      return stop(
        "Do not write: held",
        "Somebody stopped this device. Put it aside; it goes on when a second person has ended the hold.",
      );
    case "scrapped":
      return stop("Do not write: scrapped", "This device was scrapped. It must not come back into the lot.");
    case "not-in-package":
      return stop(
        "Not in this package",
        `Release ${lot.live?.version ?? ""} holds no image of it. Put it aside and tell an engineer.`,
      );
    case "other-lot":
      return stop(`Belongs to lot ${answer.lot ?? ""}`, "Take it off this bench, or choose its lot.");
    case "unknown-serial":
      return stop("Unknown serial", "No device has this serial. Scan again; if it stays so, put the device aside.");
    case "nothing-live":
      return stop("Do not write: nothing is live", "The release was withdrawn. Stop, and ask an engineer.");
    default:
      return stop(
        "Stop: another release is live now",
        "Choose the lot again, compare the seal with the station's, then go on.",
      );
  }
}
