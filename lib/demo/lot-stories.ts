/** What happened to each lot of the demo, oldest first. */
import { benchFamily, floorFamily } from "./families";
import { approveSets, deriveLot, makeLot, readPooledRuns, readRun, refuseSets } from "./lot";
import type { Story } from "./story";

export interface LotStory {
  about: string;
  happen(story: Story): Promise<void>;
}

const bench = { family: benchFamily, firmware: "2.3.0" };
const floor = { family: floorFamily, firmware: "4.1.0" };
const pooled = { method: "pooled-gain", order: 1 } as const;
const quadratic = { method: "individual", order: 2 } as const;
const FLOOR_TEMPERATURES_C = [-5, 10, 22, 40];

const written: LotStory = {
  about: "MW20-2601: 2,000 devices, released and mostly written",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 60, 9);
    const lot = await makeLot(story, { ...bench, code: "MW20-2601", devices: 2000 });
    clock.to(today, 58, 20);
    await readPooledRuns(story, lot, 24, 60);
    clock.to(today, 57, 10);
    const derivation = await deriveLot(story, lot, pooled);
    clock.to(today, 56, 11);
    await approveSets(story, derivation);
  },
};

const proposed: LotStory = {
  about: "MW20-2604: coefficients wait for a second person",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 6, 9);
    const lot = await makeLot(story, { ...bench, code: "MW20-2604", devices: 36 });
    clock.to(today, 4, 20);
    await readPooledRuns(story, lot, 12, 6);
    clock.to(today, 3, 9);
    const exclude = [
      { serial: "MW20-2604-00004", reason: "Cable was pinched by the chamber door; see the run's note" },
    ];
    await deriveLot(story, lot, { ...pooled, exclude });
  },
};

const refused: LotStory = {
  about: "MW300-2604: some coefficients refused",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 5, 8);
    const lot = await makeLot(story, { ...floor, code: "MW300-2604", devices: 10 });
    clock.to(today, 4, 21);
    await readRun(story, lot, { purpose: "sample", devices: [0], temperaturesC: FLOOR_TEMPERATURES_C });
    clock.to(today, 3, 10);
    const derivation = await deriveLot(story, lot, quadratic);
    clock.to(today, 2, 9);
    await approveSets(
      story,
      derivation,
      lot.devices.slice(0, 8).map((device) => device.serial),
    );
    const rest = lot.devices.slice(8).map((device) => device.serial);
    await refuseSets(story, derivation, rest, "Condensation was seen on both boards; read them again");
  },
};

const read: LotStory = {
  about: "MW20-2605: readings in, nothing derived yet",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 3, 12);
    const lot = await makeLot(story, { ...bench, code: "MW20-2605", devices: 30 });
    clock.to(today, 2, 20);
    const temperaturesC = [10, 21.5, 40];
    await readRun(story, lot, { purpose: "sample", devices: [0, 12], temperaturesC });
    await readRun(story, lot, { purpose: "zero", devices: [12, -6], temperaturesC: [10, 40], soakMinutes: 84 });
    await readRun(story, lot, { purpose: "span", devices: [12, -6], temperaturesC: [21.5] });
    await readRun(story, lot, { purpose: "verification", devices: [-6], temperaturesC });
  },
};

const planned: LotStory = {
  about: "MW20-2606: serials only",
  async happen(story) {
    story.clock.to(story.today, 1, 9);
    await makeLot(story, { ...bench, code: "MW20-2606", devices: 120 });
  },
};

export const lotStories: readonly LotStory[] = [written, proposed, refused, read, planned];
