"use client";

import { usePathname, useRouter } from "next/navigation";
import { inputLook } from "@/app/_components/form/field";
import { stateOf } from "@/app/_components/state/state-of";
import type { Comparable } from "@/lib/services/packages/choose-against";

/** Which package is the older side; the choice stands in the address. */
export function AgainstChoice({ options, chosen }: { options: readonly Comparable[]; chosen: string }) {
  const router = useRouter();
  const path = usePathname();
  if (options.length < 2) return null;
  return (
    <label className="flex items-center gap-2 text-sm">
      <span className="whitespace-nowrap">Compare with</span>
      <select
        value={chosen}
        onChange={(event) => router.push(`${path}?against=${event.currentTarget.value}`)}
        className={`${inputLook} enabled:read-only:bg-paper h-8`}
      >
        {options.map((option) => (
          <option key={option.id} value={option.id}>
            {option.version}, {stateOf("package", option.state).word}
          </option>
        ))}
      </select>
    </label>
  );
}
