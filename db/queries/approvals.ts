import type { Db, Trx } from "@/db/executor";

export type SubjectKind = "family-revision" | "layout" | "derivation" | "package" | "reinstatement";

export interface NewApproval {
  id: string;
  subjectKind: SubjectKind;
  subjectId: string;
  decision: "approve" | "refuse" | "revoke";
  personId: string;
  personName: string;
  /** What the signature means, in plain words, as the person saw it. */
  meaning: string;
  reason: string | null;
  /** What was decided over: a package's review digest, else the SHA-256 of the document or derivation; null for a reinstatement. */
  digest: Buffer | null;
  /** How many devices a partial decision names; null for all. */
  serialCount: number | null;
  at: Date;
}

/**
 * Records a decision. The database locks the subject and refuses makers, people without the role, a wrong state and another digest.
 * @throws `<noun>.self_approval`, `<noun>.wrong_state`, `<noun>.changed`, `auth.forbidden` as raised by its trigger
 */
export async function insertApproval(trx: Trx, approval: NewApproval): Promise<void> {
  await trx.insertInto("approval").values(approval).execute();
}

export type ApprovalRow = Omit<NewApproval, "subjectKind" | "decision"> & { subjectKind: string; decision: string };

const approvalColumns = [
  "id",
  "subjectKind",
  "subjectId",
  "decision",
  "personId",
  "personName",
  "meaning",
  "reason",
  "digest",
  "serialCount",
  "at",
] as const;

/** Decisions over one subject, oldest first. */
export function listApprovals(db: Db, subjectKind: SubjectKind, subjectId: string): Promise<ApprovalRow[]> {
  return db
    .selectFrom("approval")
    .select(approvalColumns)
    .where("subjectKind", "=", subjectKind)
    .where("subjectId", "=", subjectId)
    .orderBy("at")
    .orderBy("id")
    .execute();
}
