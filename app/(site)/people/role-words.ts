import type { Role } from "@/lib/domain/roles";

/** What each role may do, in one line. */
export const roleWords: Record<Role, string> = {
  engineer: "Families, layouts, lots, readings, derivations and packages; stops a bad release",
  reviewer: "Approves coefficients, layouts and releases that others made",
  operator: "Runs a programming station: writes devices and scans serials, sees live packages only",
  service: "Looks up serials, checks memory dumps, reports what happened to a device",
  auditor: "Reads everything, exports, verifies the ledger; changes nothing",
  admin: "People and roles, stations, keys and mail; approves nothing by virtue of it",
};
