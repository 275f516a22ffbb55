import { Notice } from "@/app/_components/notice";
import type { RoleWarning } from "@/schemas/api/people";

/** Says which roles too few people can act in, before somebody is stuck with their own work. */
export function RoleWarnings({ warnings }: { warnings: readonly RoleWarning[] }) {
  if (warnings.length === 0) return null;
  return (
    <Notice tone="caution" title="Some work could not go on">
      <ul className="flex flex-col gap-1">
        {warnings.map((warning) => (
          <li key={warning.role}>{warning.message}</li>
        ))}
      </ul>
    </Notice>
  );
}
