import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import type { DemoAccount } from "@/lib/services/account/list-demo-accounts";

export interface DemoAccountsProps {
  accounts: readonly DemoAccount[];
  onChoose(account: DemoAccount): void;
}

/** The people of the demo's invented maker, one button each to fill in the form. */
export function DemoAccounts({ accounts, onChoose }: DemoAccountsProps) {
  return (
    <Card title="Demo accounts" note="invented people and data">
      <p className="text-sm text-ink-soft">
        All with the password <span className="font-mono text-ink">{DEMO_PASSWORD}</span>. Four eyes need two people:
        what an engineer makes, a reviewer approves.
      </p>
      <ul className="mt-2">
        {accounts.map((account) => (
          <li key={account.email} className="flex items-center gap-3 border-t border-rule py-1.5 first:border-t-0">
            <div className="min-w-0 flex-1">
              <p className="flex flex-wrap gap-x-2">
                <span className="font-semibold">{account.name}</span>
                <span className="text-ink-soft">{account.roles.join(", ") || "no role"}</span>
              </p>
              <p className="truncate font-mono text-xs text-ink-soft">{account.email}</p>
            </div>
            <Button
              onClick={() => onChoose(account)}
              aria-label={`Fill in ${account.name}, ${account.roles.join(", ")}`}
            >
              Fill in
            </Button>
          </li>
        ))}
      </ul>
    </Card>
  );
}
