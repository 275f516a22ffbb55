import { READERS } from "@/lib/domain/roles";
import { getProofRun as getRun } from "@/lib/services/proofs/judge-proof-run";
import { listLotProofs as listProofs } from "@/lib/services/proofs/list-lot-proofs";
import { byCodeOrId, byId } from "@/schemas/api/common";
import { lotProofs, proofRun } from "@/schemas/api/proofs";
import { command } from "../command";

export const getProofRun = command({
  id: "proofs.run",
  method: "GET",
  path: "/runs/{id}/proof",
  summary: "A proof run's outputs against the predictions from the images the devices carried",
  access: { who: "person", roles: READERS },
  params: byId,
  reply: { status: 200, schema: proofRun },
  errors: ["run.not_found", "run.no_proof"],
  handle: (ctx, { params }) => getRun(ctx, params.id),
});

export const listLotProofs = command({
  id: "proofs.lot",
  method: "GET",
  path: "/lots/{code}/proofs",
  summary: "What a lot's proof runs show, by layout and firmware, and of what is live",
  access: { who: "person", roles: READERS },
  params: byCodeOrId,
  reply: { status: 200, schema: lotProofs },
  errors: ["lot.not_found"],
  handle: (ctx, { params }) => listProofs(ctx, params.code),
});

export const proofCommands = [getProofRun, listLotProofs];
