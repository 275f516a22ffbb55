import { notFound } from "next/navigation";
import { orNotFound } from "@/lib/http/page-context";
import type { PersonCtx } from "@/lib/services/context";
import { getPackageView } from "@/lib/services/packages/get-package";
import { id as packageId } from "@/schemas/api/common";
import type { PackageView } from "@/schemas/api/packages";

export interface PackageParams {
  params: Promise<{ package: string }>;
}

/** The package of a page's address; what is no id is not found either. */
export async function loadPackage(ctx: PersonCtx, params: PackageParams["params"]): Promise<PackageView> {
  const id = packageId.safeParse((await params).package);
  if (!id.success) notFound();
  return orNotFound(getPackageView(ctx, id.data));
}
