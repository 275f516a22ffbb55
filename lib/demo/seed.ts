/** The demo: an invented maker with two families and lots in every stage, made by going through the services. */
import type { Db } from "@/db/executor";
import { layGround } from "./ground";
import { addDemoStations, lotStories } from "./lot-stories";
import { addDemoPeople } from "./people";
import { DemoClock, makeStory } from "./story";

const DAYS_TOLD = 70;

/**
 * Fills an empty database with the demo. Its drift figures are the same at every run; its dates lie before today.
 * @param say told which lot is being made.
 */
export async function seedDemo(db: Db, say: (line: string) => void): Promise<void> {
  const today = new Date();
  const clock = new DemoClock(today, DAYS_TOLD);
  const people = await addDemoPeople(db, clock);
  const story = makeStory(db, today, clock, people);
  await layGround(story);
  const stations = await addDemoStations(story);
  for (const tell of lotStories) {
    say(`  ${tell.about}`);
    await tell.happen(story, stations);
  }
}
