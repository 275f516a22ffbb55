/** What happened to each lot of the demo, in the order of time: the clock never goes back. */

import { DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import { recordDeviceEvent } from "@/lib/services/devices/record-device-event";
import { withdrawPackage } from "@/lib/services/packages/release-package";
import { askReinstatement } from "@/lib/services/reinstatements/ask-reinstatement";
import { benchFamily, floorFamily } from "./families";
import { askForLayout, publishLayout } from "./ground";
import { benchLayouts } from "./layouts";
import { approveSets, type DemoLot, deriveLot, makeLot, readPooledRuns, readRun, refuseSets } from "./lot";
import { planSampleRun } from "./plan";
import { proveDevices } from "./proof";
import { approvePackage, askForReview, buildLot, release } from "./release";
import { addDemoStation, type DemoStation, type Mishaps, writeDevices } from "./stations";
import type { Story } from "./story";

export interface Stations {
  bench: DemoStation;
  floor: DemoStation;
}

export interface LotStory {
  about: string;
  happen(story: Story, stations: Stations): Promise<void>;
}

const bench = { family: benchFamily, firmware: "2.3.0" };
const floor = { family: floorFamily, firmware: "4.1.0" };
const pooled = { method: "pooled-gain", order: 1 } as const;
const quadratic = { method: "individual", order: 2 } as const;
const FLOOR_TEMPERATURES_C = [-5, 10, 22, 40];
const SEEN = "Looked at device by device; within what the lot is for.";

export async function addDemoStations(story: Story): Promise<Stations> {
  return {
    bench: await addDemoStation(story, "Bench 1", ["MW-20"]),
    floor: await addDemoStation(story, "Bench 2", ["MW-20", "MW-300"]),
  };
}

/** A lot of MW-20 with approved coefficients, from its serials at `day` days ago to the approval three days later. */
async function benchLotTo(story: Story, day: number, code: string, devices: number, sample: number): Promise<DemoLot> {
  const { clock, today } = story;
  clock.to(today, day, 9);
  const lot = await makeLot(story, { ...bench, code, devices });
  clock.to(today, day - 1, 21);
  await readPooledRuns(story, lot, sample, Math.max(5, Math.round(devices * 0.03)));
  clock.to(today, day - 2, 9);
  const derivation = await deriveLot(story, lot, pooled);
  clock.to(today, day - 2, 15);
  await approveSets(story, derivation);
  return lot;
}

/** As above for MW-300: every device measured, trimmed on its own, quadratic. */
async function floorLotTo(story: Story, day: number, code: string, devices: number): Promise<DemoLot> {
  const { clock, today } = story;
  clock.to(today, day, 9);
  const lot = await makeLot(story, { ...floor, code, devices });
  clock.to(today, day - 1, 21);
  await readRun(story, lot, { purpose: "sample", devices: [0], temperaturesC: FLOOR_TEMPERATURES_C });
  clock.to(today, day - 2, 9);
  const derivation = await deriveLot(story, lot, quadratic);
  clock.to(today, day - 2, 15);
  await approveSets(story, derivation);
  return lot;
}

async function buildAndRelease(story: Story, lot: DemoLot, day: number, layout: string): Promise<string> {
  const { clock, today } = story;
  clock.to(today, day, 8);
  const id = await buildLot(story, lot, layout);
  await askForReview(story, id, SEEN);
  clock.to(today, day, 14);
  await approvePackage(story, id);
  clock.to(today, day, 15);
  await release(story, id);
  return id;
}

const written: LotStory = {
  about: "MW20-2601: 2,000 devices, released and mostly written",
  async happen(story, stations) {
    const lot = await benchLotTo(story, 60, "MW20-2601", 2000, 24);
    const id = await buildAndRelease(story, lot, 56, "1.0.0");
    const mishaps: Mishaps = {
      "MW20-2601-00212": "mismatch",
      "MW20-2601-00388": "interrupted",
      "MW20-2601-00941": "failed",
      "MW20-2601-01377": "mismatch",
    };
    const perShift = 140;
    for (let shift = 0; shift < 12; shift++) {
      story.clock.to(story.today, 55 - Math.floor(shift / 2), shift % 2 === 0 ? 10 : 15);
      const devices: [number, number] = [shift * perShift, (shift + 1) * perShift];
      await writeDevices(story, stations.bench, lot, { package: id, devices, mishaps });
    }
    story.clock.to(story.today, 49, 16);
    await writeDevices(story, stations.bench, lot, { package: id, devices: [211, 212] });
    story.clock.to(story.today, 48, 21);
    await proveDevices(story, lot, { package: id, devices: [0, 3], temperaturesC: [10, 40] });
  },
};

const rederived: LotStory = {
  about: "MW20-2602: released twice, some devices still to be written again",
  async happen(story, stations) {
    const { clock, today } = story;
    const lot = await benchLotTo(story, 46, "MW20-2602", 60, 12);
    const first = await buildAndRelease(story, lot, 43, "1.0.0");
    clock.to(today, 42, 11);
    await writeDevices(story, stations.floor, lot, { package: first, devices: [0, 44] });
    clock.to(today, 32, 20);
    const reason = "The reference sensor had come loose from its well; read again after it was fixed";
    const replaced = lot.runs[1] ?? "";
    await readRun(story, lot, {
      purpose: "zero",
      devices: [12, -5],
      temperaturesC: [10, 40],
      by: "engineer2",
      supersedes: { run: replaced, reason },
    });
    clock.to(today, 31, 10);
    const derivation = await deriveLot(story, lot, pooled);
    await approveSets(story, derivation);
    clock.to(today, 30, 9);
    await publishLayout(story, benchLayouts.withCapacity);
    const second = await buildAndRelease(story, lot, 29, "1.1.0");
    clock.to(today, 28, 10);
    await writeDevices(story, stations.floor, lot, { package: second, devices: [0, 18] });
  },
};

const againLot: LotStory = {
  about: "MW300-2601: quadratic, derived once more, and the earlier release asked for",
  async happen(story, stations) {
    const { clock, today } = story;
    const lot = await floorLotTo(story, 26, "MW300-2601", 24);
    const first = await buildAndRelease(story, lot, 23, "1.0.0");
    clock.to(today, 22, 11);
    await writeDevices(story, stations.floor, lot, { package: first, devices: [0] });
    clock.to(today, 18, 10);
    await approveSets(story, await deriveLot(story, lot, { method: "pooled-gain", order: 2 }));
    const second = await buildAndRelease(story, lot, 17, "1.0.0");
    clock.to(today, 16, 10);
    await writeDevices(story, stations.floor, lot, { package: second, devices: [0, 3] });
    await askReinstatement(story.as("engineer2"), {
      lot: lot.code,
      package: first,
      reason:
        "Three devices written with 1.0.1 show a jump of zero on the scale; stay with 1.0.0 until it is understood",
      password: DEMO_PASSWORD,
    });
  },
};

const withdrawn: LotStory = {
  about: "MW300-2603: withdrawn by one person",
  async happen(story, stations) {
    const { clock, today } = story;
    const lot = await floorLotTo(story, 15, "MW300-2603", 20);
    const id = await buildAndRelease(story, lot, 12, "1.0.0");
    clock.to(today, 11, 10);
    await writeDevices(story, stations.floor, lot, { package: id, devices: [0, 6] });
    clock.to(today, 11, 12);
    const reason =
      "Firmware 4.1.0 was loaded with a wrong filter on this lot; nothing more is written until it is replaced";
    await withdrawPackage(story.as("engineer2"), { id, reason, password: DEMO_PASSWORD });
  },
};

const fieldEvents: LotStory = {
  about: "MW20-2601 in the field: shipped, returned, held, one board replaced",
  async happen(story) {
    const { clock, today } = story;
    const report = (
      by: "service" | "engineer",
      number: number,
      event: Parameters<typeof recordDeviceEvent>[1]["event"],
    ) => recordDeviceEvent(story.as(by), { serial: `MW20-2601-${String(number).padStart(5, "0")}`, event });
    clock.to(today, 14, 9);
    for (const number of [3, 7, 11, 19]) {
      await report("service", number, { kind: "shipped", reason: "Shipped in platform scales", reference: "DN-5512" });
    }
    clock.to(today, 13, 9);
    await report("service", 19, { kind: "returned", reason: "Scale shows 0.2 % high at 5 kg", reference: "RMA-0107" });
    await report("service", 19, {
      kind: "board-replaced",
      reason: "Connector torn off the board",
      hardwareId: "B-00C0FFEE",
    });
    clock.to(today, 12, 20);
    const password = DEMO_PASSWORD;
    await report("engineer", 212, { kind: "hold", reason: "Readback differed; look at the board first", password });
    await report("engineer", 1377, { kind: "hold", reason: "Readback differed twice", password });
    await recordDeviceEvent(story.as("service"), {
      serial: "MW20-2601-00212",
      event: { kind: "resume", reason: "Cold joint found and mended; verified on the bench", password },
    });
  },
};

const inReview: LotStory = {
  about: "MW20-2603: in review",
  async happen(story) {
    const lot = await benchLotTo(story, 9, "MW20-2603", 40, 12);
    story.clock.to(story.today, 6, 9);
    const id = await buildLot(story, lot, "1.1.0", "First lot with the new adhesive");
    await askForReview(story, id, SEEN);
  },
};

const approved: LotStory = {
  about: "MW300-2602: approved, not yet released",
  async happen(story) {
    const lot = await floorLotTo(story, 6, "MW300-2602", 18);
    story.clock.to(story.today, 4, 16);
    const id = await buildLot(story, lot, "1.0.0");
    await askForReview(story, id, SEEN);
    await approvePackage(story, id);
  },
};

const draft: LotStory = {
  about: "MW20-2607: a draft with a warning to be waived",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 4, 17);
    const lot = await makeLot(story, { ...bench, code: "MW20-2607", devices: 32 });
    await readPooledRuns(story, lot, 12, 6);
    const derivation = await deriveLot(story, lot, pooled);
    const serials = lot.devices.map((device) => device.serial);
    await approveSets(story, derivation, serials.slice(0, 29));
    await buildLot(story, lot, "1.1.0");
  },
};

/** Its zero lies beyond what the layout's field may hold. */
const FAR_ZERO_MV_V = 0.62;

const failed: LotStory = {
  about: "MW20-2608: a build that failed at a limit",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 4, 19);
    const lot = await makeLot(story, {
      ...bench,
      code: "MW20-2608",
      devices: 24,
      adjust: (device, index) =>
        index === 16 ? { ...device, zero: [FAR_ZERO_MV_V, device.zero[1], device.zero[2]] } : device,
    });
    await readPooledRuns(story, lot, 10, 5);
    await approveSets(story, await deriveLot(story, lot, pooled));
    await buildLot(story, lot, "1.1.0");
  },
};

const proposed: LotStory = {
  about: "MW20-2604: coefficients wait for a second person",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 4, 20);
    const lot = await makeLot(story, { ...bench, code: "MW20-2604", devices: 36 });
    clock.to(today, 3, 21);
    const temperaturesC = [10, 21.5, 40];
    await readRun(story, lot, { purpose: "sample", devices: [0, 12], temperaturesC, soakMinutes: 82 });
    await readRun(story, lot, { purpose: "zero", devices: [12, -6], temperaturesC });
    await readRun(story, lot, { purpose: "span", devices: [12, -6], temperaturesC: [21.5] });
    await readRun(story, lot, { purpose: "verification", devices: [-6], temperaturesC });
    clock.to(today, 2, 9);
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
    clock.to(today, 2, 10);
    const lot = await makeLot(story, { ...floor, code: "MW300-2604", devices: 10 });
    await readRun(story, lot, { purpose: "sample", devices: [0], temperaturesC: FLOOR_TEMPERATURES_C });
    const derivation = await deriveLot(story, lot, quadratic);
    const serials = lot.devices.map((device) => device.serial);
    clock.to(today, 2, 16);
    await approveSets(story, derivation, serials.slice(0, 8));
    await refuseSets(story, derivation, serials.slice(8), "Condensation was seen on both boards; read them again");
  },
};

const read: LotStory = {
  about: "MW20-2605: readings in, nothing derived yet",
  async happen(story) {
    const { clock, today } = story;
    clock.to(today, 2, 17);
    const lot = await makeLot(story, { ...bench, code: "MW20-2605", devices: 30 });
    clock.to(today, 1, 20);
    const temperaturesC = [10, 21.5, 40];
    await readRun(story, lot, { purpose: "sample", devices: [0, 12], temperaturesC });
    await readRun(story, lot, { purpose: "zero", devices: [12, -6], temperaturesC: [10, 40], soakMinutes: 84 });
    await readRun(story, lot, { purpose: "span", devices: [12, -6], temperaturesC: [21.5] });
    await readRun(story, lot, { purpose: "verification", devices: [-6], temperaturesC });
  },
};

const planned: LotStory = {
  about: "MW20-2606: a sample drawn and its run planned; a layout waits for a second person",
  async happen(story) {
    story.clock.to(story.today, 1, 21);
    await planSampleRun(story, await makeLot(story, { ...bench, code: "MW20-2606", devices: 120 }));
    await askForLayout(story, benchLayouts.withLot);
  },
};

export const lotStories: readonly LotStory[] = [
  written,
  rederived,
  againLot,
  withdrawn,
  fieldEvents,
  inReview,
  approved,
  draft,
  failed,
  proposed,
  refused,
  read,
  planned,
];
