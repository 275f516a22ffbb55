import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import type { Db } from "@/db/executor";
import { listLayoutsOfPackages } from "@/db/queries/package-layouts";

/** Compiled layouts by package id; one compilation a layout, so that images of one layout are compared as such. */
export async function layoutsOfPackages(db: Db, packageIds: readonly string[]): Promise<Map<string, CompiledLayout>> {
  const byLayout = new Map<string, CompiledLayout>();
  const byPackage = new Map<string, CompiledLayout>();
  for (const row of await listLayoutsOfPackages(db, packageIds)) {
    const compiled = byLayout.get(row.layoutId) ?? compileLayout(row.document);
    byLayout.set(row.layoutId, compiled);
    byPackage.set(row.packageId, compiled);
  }
  return byPackage;
}
