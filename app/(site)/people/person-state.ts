import type { PersonView } from "@/schemas/api/people";

/** State of a person for the mark of kind `person`. */
export function personState({ active, signIn }: PersonView): "active" | "waiting" | "deactivated" {
  if (!active) return "deactivated";
  return signIn?.passwordChosen === false ? "waiting" : "active";
}
