"use client";

import type { LayoutView } from "@/lib/services/layouts/get-layout";
import type { LintBasis } from "@/lib/services/layouts/lint-document";
import { DecisionPanel } from "../../decision-panel";
import { judgeText } from "./judge-text";
import { Differences, LintList } from "./judged-cards";
import { decideLayoutAction } from "./layout-actions";

export interface LayoutDecisionProps {
  family: string;
  layout: LayoutView;
  basis: LintBasis;
  oneTimeCode: boolean;
}

/** The signing panel of a layout under review, with its differences to what is published. */
export function LayoutDecision({ family, layout, basis, oneTimeCode }: LayoutDecisionProps) {
  const judged = judgeText(layout.source, basis);
  return (
    <DecisionPanel
      subject={`layout ${layout.version} of family ${family}`}
      digest={layout.sha256}
      makers={layout.makers}
      oneTimeCode={oneTimeCode}
      changes={
        <div className="flex flex-col gap-3">
          {judged.previous === null ? (
            <p className="text-sm">Nothing lower is published: all of it is new. The memory map below shows it.</p>
          ) : null}
          <Differences against={judged.previous} reasons={judged.reasons} step={judged.step} />
          <LintList judged={judged} basis={basis} />
        </div>
      }
      onDecide={(decision) => decideLayoutAction({ code: family, version: layout.version }, decision)}
    />
  );
}
