import type { Db } from "@/db/executor";
import { listApprovals, type SubjectKind } from "@/db/queries/approvals";
import { listMakers, type MakerSubject } from "@/db/queries/makers";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import type { PublishState } from "@/schemas/api/families";

/** Refuses what is not in the state that a move starts from. @throws AppError `<noun>.wrong_state` {state, needs} */
export function assertState(noun: "family" | "layout", state: PublishState, needs: PublishState): void {
  if (state === needs) return;
  const words = { draft: "a draft", "in-review": "in review", published: "published", retired: "retired" };
  throw new AppError(`${noun}.wrong_state`, {
    state,
    needs,
    message: `This is ${words[state]}; it has to be ${words[needs]}.`,
  });
}

/** Taking back is for whoever asked; a reviewer refuses instead. @throws AppError `auth.forbidden` */
export function assertMayTakeBack(ctx: PersonCtx, submittedBy: string | null): void {
  if (submittedBy === ctx.actor.id) return;
  throw new AppError("auth.forbidden", {
    message: "Only who asked for publishing takes it back; a reviewer can refuse it.",
  });
}

/** Decisions over a subject and the names of who wrote it, as replies show them. */
export async function listSignatures(db: Db, kind: MakerSubject & SubjectKind, subjectId: string) {
  const [approvals, makers] = [await listApprovals(db, kind, subjectId), await listMakers(db, kind, subjectId)];
  const decisions = approvals.map(({ decision, personName, meaning, reason, at }) => ({
    decision: decision as "approve" | "refuse" | "revoke",
    name: personName,
    meaning,
    reason,
    at: at.toISOString(),
  }));
  return {
    decisions,
    makers: [...new Set(makers.map((maker) => maker.name))],
  };
}

/** Whether the person of a page wrote a subject, so that they can't decide on it. */
export async function isMaker(ctx: PersonCtx, kind: MakerSubject, subjectId: string): Promise<boolean> {
  const makers = await listMakers(ctx.db, kind, subjectId);
  return makers.some((maker) => maker.personId === ctx.actor.id);
}
