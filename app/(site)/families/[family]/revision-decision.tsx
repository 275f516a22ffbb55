"use client";

import type { ReactNode } from "react";
import { decideRevisionAction } from "../actions";
import { DecisionPanel } from "../decision-panel";

export interface RevisionDecisionProps {
  code: string;
  number: number;
  digest: string;
  makers: readonly string[];
  oneTimeCode: boolean;
  changes: ReactNode;
}

/** The signing panel of a revision under review. */
export function RevisionDecision({ code, number, ...rest }: RevisionDecisionProps) {
  return (
    <DecisionPanel
      {...rest}
      subject={`revision ${number} of family ${code}`}
      onDecide={(decision) => decideRevisionAction(code, number, decision)}
    />
  );
}
