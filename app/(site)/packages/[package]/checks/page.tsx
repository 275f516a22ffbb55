import type { Metadata } from "next";
import { pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { loadPackage, type PackageParams } from "../load-package";
import { openWarnings } from "../package-moves";
import { PackageShell } from "../package-shell";
import { CheckCard } from "./check-card";
import { WaiveButton } from "./waive-button";

export const metadata: Metadata = { title: "Checks of a package" };

const order = ["fail", "warn", "pass"];

export default async function ChecksPage({ params }: PackageParams) {
  const ctx = await pageContext();
  const view = await loadPackage(ctx, params);
  const oneTimeCode = await hasOneTimeCode(ctx);
  const open = new Set(openWarnings(view).map((check) => check.code));
  const mayWaive = view.state === "draft" && view.mayDecide;
  const sorted = [...view.checks].sort((a, b) => order.indexOf(a.verdict) - order.indexOf(b.verdict));
  return (
    <PackageShell ctx={ctx} view={view} tab="checks">
      <p className="text-sm text-ink-soft">
        The machine decoded what was built and looked at it again. A fail can't be waived; a warning needs a reason from
        a reviewer who had no hand in the package{whoOf(view.reviewers)}.
      </p>
      {sorted.map((check) => (
        <CheckCard
          key={check.code}
          check={check}
          waivers={view.waivers}
          waive={
            mayWaive && open.has(check.code) ? (
              <WaiveButton id={view.id} check={check} oneTimeCode={oneTimeCode} />
            ) : undefined
          }
        />
      ))}
    </PackageShell>
  );
}

function whoOf(reviewers: readonly string[]): string {
  return reviewers.length > 0 ? `: ${reviewers.join(", ")}` : "; nobody is left who may";
}
