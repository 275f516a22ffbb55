import { z } from "zod";
import { askRebuild } from "@/lib/services/packages/rebuild-package";
import { byId, id } from "@/schemas/api/common";
import { command } from "../command";

export const rebuildPackage = command({
  id: "packages.rebuild",
  method: "POST",
  path: "/packages/{id}/rebuild",
  summary: "Compose a built package again from its inputs and compare; the result stands on the package as `rebuild`",
  access: { who: "person", roles: ["engineer", "reviewer"] },
  params: byId,
  reply: { status: 202, schema: z.object({ id, rebuild: z.null() }) },
  errors: ["package.not_found", "package.not_built"],
  handle: async (ctx, { params }) => {
    await askRebuild(ctx, params);
    return { id: params.id, rebuild: null };
  },
});

export const rebuildCommands = [rebuildPackage];
