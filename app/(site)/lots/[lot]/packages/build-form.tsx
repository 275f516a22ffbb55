"use client";

import Link from "next/link";
import { useRouter } from "next/navigation";
import { useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FormError } from "@/app/_components/form/form-error";
import { Select } from "@/app/_components/form/select";
import { TextArea } from "@/app/_components/form/text-area";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { PackagePlan } from "@/lib/services/packages/plan-package";
import { buildPackageAction } from "../../../packages/actions";
import { Signers, WouldPack } from "./plan-parts";

const steps = [
  { value: "", name: "As computed from layout and devices" },
  { value: "minor", name: "At least minor" },
  { value: "major", name: "Major" },
];

/** Layout, step and notes of a new package; what it would hold and who could sign it stand beside them. */
export function BuildForm({ lot, plan }: { lot: string; plan: PackagePlan }) {
  const router = useRouter();
  const fitting = plan.layouts.filter((layout) => layout.fits);
  const [version, setVersion] = useState(fitting[0]?.version ?? "");
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const layout = plan.layouts.find((one) => one.version === version);
  const content = layout && plan.content[layout.order];

  const send = async (form: FormData) => {
    setPending(true);
    setProblem(null);
    const text = (name: string) => String(form.get(name) ?? "").trim() || undefined;
    const result = await buildPackageAction(lot, { layout: version, step: text("step"), notes: text("notes") }).catch(
      (error: unknown) => ({ ok: false as const, problem: problemOf(error) }),
    );
    if (result.ok) return router.push(`/packages/${result.value.id}`);
    setPending(false);
    setProblem(result.problem);
  };

  if (fitting.length === 0) return <NoLayout plan={plan} lot={lot} />;
  return (
    <Card title="Build a package" note="The same inputs give the same bytes, on any machine">
      <div className="grid gap-x-8 gap-y-5 lg:grid-cols-[minmax(0,5fr)_minmax(0,4fr)]">
        <form
          className="flex flex-col gap-4"
          onSubmit={(event) => {
            event.preventDefault();
            void send(new FormData(event.currentTarget));
          }}
        >
          <div className="grid gap-4 sm:grid-cols-2">
            <Select
              label="Layout"
              value={version}
              onChange={(event) => setVersion(event.currentTarget.value)}
              options={plan.layouts.map((one) => ({
                value: one.version,
                name: `${one.version}, order ${one.order}${one.fits ? "" : `, not for firmware ${plan.firmware}`}`,
                disabled: !one.fits,
              }))}
              help={layout ? `For firmware ${layout.firmware}; the lot runs ${plan.firmware}.` : undefined}
            />
            <Select
              label="Version step"
              name="step"
              options={steps}
              help="Major where the layout's major changed, minor where layout or devices did, else patch; it can only be raised."
            />
          </div>
          <TextArea label="Notes" name="notes" maxLength={2000} help="Why this package: its reviewer reads it first." />
          <FormError problem={problem} />
          <div>
            <Button
              type="submit"
              look="primary"
              pending={pending}
              pendingText="Starting"
              disabled={!content || content.packed === 0}
            >
              Build a package of {formatNumberOf(content?.packed ?? 0, "device")}
            </Button>
          </div>
        </form>
        <div className="flex min-w-0 flex-col gap-4 text-sm">
          {content ? <WouldPack content={content} devices={plan.devices} lot={lot} /> : null}
          <Signers signers={plan.signers} />
        </div>
      </div>
    </Card>
  );
}

function NoLayout({ plan, lot }: { plan: PackagePlan; lot: string }) {
  return (
    <Card title="Build a package">
      <p className="text-sm text-ink-soft">
        {plan.layouts.length === 0
          ? "The family has no published layout yet: it says which byte holds what. "
          : `No published layout is for firmware ${plan.firmware}, which lot ${lot} runs. `}
        <Link href="/families">Write one</Link>; a second person publishes it.
      </p>
    </Card>
  );
}
