import { AppError } from "@/lib/errors";

/** What a violated constraint means to a caller. Constraints that only a bug can violate are left out on purpose. */
const CODE_BY_CONSTRAINT: Record<string, string> = {
  person_email_unique: "person.exists",
  family_code_unique: "family.exists",
  layout_version_unique: "layout.exists",
  equipment_code_unique: "equipment.exists",
  lot_code_unique: "lot.exists",
  device_serial_unique: "device.in_other_lot",
  run_bytes_once: "run.duplicate",
  run_supersedes_once: "run.already_superseded",
  run_plan_name_unique: "run_plan.exists",
  package_version_unique: "package.changed",
  package_one_live: "package.live_changed",
  live_period_sequence_unique: "package.live_changed",
  waiver_once: "waiver.exists",
  reinstatement_one_open: "reinstatement.exists",
  station_name_unique: "station.exists",
  role_grant_open: "role.exists",
  role_grant_not_own: "person.own_roles",
};

/** Classes and codes of SQLSTATE that mean "the server cannot be reached or is going down". */
const UNAVAILABLE = /^(08|57P0)/;
const UNAVAILABLE_NODE = new Set(["ECONNREFUSED", "ECONNRESET", "ETIMEDOUT", "ENOTFOUND", "EPIPE"]);

interface DatabaseFault {
  code?: string;
  constraint?: string;
  message?: string;
  detail?: string;
}

/**
 * Translates an error of the database driver into the product's own; undefined where it means nothing to a caller.
 * `TW001` is what our triggers raise, with the code as its message.
 */
export function appErrorFromDatabase(error: unknown): AppError | undefined {
  if (error instanceof AppError || typeof error !== "object" || error === null) return undefined;
  const fault = error as DatabaseFault;
  if (fault.code === "TW001" && fault.message)
    return new AppError(fault.message, { fact: fault.detail ?? "" }, { cause: error });
  const code = fault.code === "23505" && fault.constraint ? CODE_BY_CONSTRAINT[fault.constraint] : undefined;
  if (code) return new AppError(code, {}, { cause: error });
  if (fault.constraint === "role_grant_second_admin")
    return new AppError("person.second_admin_needed", {}, { cause: error });
  if (fault.constraint === "role_grant_not_own") return new AppError("person.own_roles", {}, { cause: error });
  const unavailable = UNAVAILABLE.test(fault.code ?? "") || UNAVAILABLE_NODE.has(fault.code ?? "");
  const lost = /Connection terminated|timeout exceeded when trying to connect/.test(fault.message ?? "");
  if (unavailable || lost) return new AppError("database.unavailable", {}, { cause: error });
  return undefined;
}
