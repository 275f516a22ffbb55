import { StateMark } from "@/app/_components/state/state-mark";
import type { Tone } from "@/app/_components/state/tone";
import { type DueState, daysUntil, dueState } from "@/lib/domain/format/certificate";

const MARKS: Record<DueState, { tone: Tone; word: string }> = {
  "in-date": { tone: "good", word: "in date" },
  "due-soon": { tone: "caution", word: "due soon" },
  overdue: { tone: "bad", word: "past its date" },
};

/** How a certificate stands, as a title row takes it. */
export function dueMark(calibratedUntil: string, today: string): { tone: Tone; word: string; title: string } {
  const days = daysUntil(calibratedUntil, today);
  const count = `${Math.abs(days)} ${Math.abs(days) === 1 ? "day" : "days"}`;
  const title = days < 0 ? `Its last day was ${count} ago` : days === 0 ? "Its last day is today" : `${count} left`;
  return { ...MARKS[dueState(calibratedUntil, today)], title };
}

export function DueMark({ calibratedUntil, today }: { calibratedUntil: string; today: string }) {
  return <StateMark {...dueMark(calibratedUntil, today)} />;
}
