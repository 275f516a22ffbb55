import { Card } from "@/app/_components/card";
import { FindingsList } from "@/app/_components/findings-list";
import { LegalNote } from "@/app/_components/legal-note";
import { PooledFacts } from "@/app/_components/pooled-facts";
import { formatCount } from "@/lib/domain/format/figure";
import { holds, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { type DerivationChart, getDerivationChart } from "@/lib/services/derivations/get-derivation-chart";
import { listDeciderNames } from "@/lib/services/derivations/list-deciders";
import { listSetPackages } from "@/lib/services/derivations/list-set-packages";
import type { DerivationView } from "@/schemas/api/derivations";
import { DerivationCharts, drawnNote } from "./charts";
import { DecisionPanel } from "./decision-panel";
import { DevicesCard } from "./devices-card";
import { DriftCharts } from "./drift-charts";
import { EnvelopeCard } from "./envelope-card";
import { ResidualChart } from "./residual-chart";
import { residualDevices } from "./residual-devices";
import { SelectionProvider } from "./selection";
import { UncertaintyCard } from "./uncertainty-card";
import { VerificationCard } from "./verification-card";

/** Everything that a finished derivation says, and what may be decided over it. */
export async function Result({ view }: { view: DerivationView }) {
  const ctx = await pageContext();
  const chart = await getDerivationChart(ctx, view.id);
  const packages = (await listSetPackages(ctx, view.id)).items;
  const deciders = await listDeciderNames(ctx, view.id);
  const isImport = view.method === "import";
  const { proposed = 0, approved = 0 } = view.counts.states;
  return (
    <SelectionProvider>
      {isImport ? null : <DerivationCharts view={view} chart={chart} />}
      <DevicesCard
        view={{ id: view.id, order: view.order, method: view.method, counts: view.counts }}
        intervals={chart.rules.intervals}
        noFreedom={view.findings.some((finding) => finding.code === "fit.no_freedom")}
        selectable={view.mayDecide && proposed + approved > 0}
      />
      <Statements view={view} chart={chart} />
      <Card title="Findings" note="What blocks, what needs a reason, what is good to know">
        <FindingsList findings={view.findings} empty="No findings." devicePath={`/derivations/${view.id}`} />
        <MoreFindings view={view} />
      </Card>
      {isImport ? null : (
        <>
          <DriftCharts chart={chart} />
          <ResidualChart devices={residualDevices(chart, view.method === "pooled-gain")} note={drawnNote(chart)} />
          {view.uncertainty ? <UncertaintyCard budget={view.uncertainty} /> : null}
          {view.envelope ? null : <LegalNote />}
        </>
      )}
      <DecisionPanel
        view={view}
        isReviewer={holds(ctx, "reviewer")}
        oneTimeCode={await hasOneTimeCode(ctx)}
        deciders={deciders}
        packages={packages}
      />
    </SelectionProvider>
  );
}

/** What the numbers amount to: the lot's gain coefficient and what verification shows. */
function Statements({ view, chart }: { view: DerivationView; chart: DerivationChart }) {
  const { confidence, coverage } = chart.rules;
  return (
    <>
      {view.pooled ? (
        <Card title="The lot's gain coefficient" note="gainTc is the correction, zeroTc the drift">
          <PooledFacts pooled={view.pooled} />
        </Card>
      ) : null}
      {view.envelope ? <EnvelopeCard derivation={view.id} rules={chart.rules} envelope={view.envelope} /> : null}
      <VerificationCard derivation={view.id} results={view.verification} confidence={confidence} coverage={coverage} />
    </>
  );
}

function MoreFindings({ view: { findings, counts } }: { view: DerivationView }) {
  const all = counts.findings.hard + counts.findings.soft + counts.findings.note;
  if (all <= findings.length) return null;
  return (
    <p className="mt-2 text-sm text-ink-soft">
      The first {formatCount(findings.length)} of {formatCount(all)}; the others stand with their devices above.
    </p>
  );
}
