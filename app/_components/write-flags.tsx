/** What each flag of a write record means: something a person should look at although the record stands. */
const meanings: Record<string, string> = {
  "not-live": "The package was not live when the write finished.",
  late: "The record came more than an hour after the write; its station may have missed a stop.",
  "clock-ahead": "The station's clock is ahead of the server's.",
  held: "The device was held.",
  "station-not-allowed": "The station is not set up for devices of this family.",
  "serial-differs": "Another serial stood in the memory before.",
  "board-changed": "The board is another one than the image was made for.",
  "firmware-differs": "The firmware is not the one the lot was planned with.",
  "zero-off": "The unloaded signal does not fit the device's own zero curve: it may be another cell.",
  "no-readback": "Nothing was read back.",
};

/** Explains the flags under a table of write records. */
export function FlagMeanings() {
  return (
    <details className="mt-3 text-sm print:hidden">
      <summary className="w-max text-slate hover:text-copper-strong">What the flags mean</summary>
      <dl className="mt-2 grid gap-x-6 gap-y-1.5 sm:grid-cols-[auto_1fr]">
        {Object.entries(meanings).map(([flag, meaning]) => (
          <div key={flag} className="contents">
            <dt className="font-semibold">{flag}</dt>
            <dd className="text-ink-soft">{meaning}</dd>
          </div>
        ))}
      </dl>
    </details>
  );
}
