/** Roles a person may hold; what each does stands in the product's description. */
export const ROLES = ["engineer", "reviewer", "operator", "service", "auditor", "admin"] as const;

export type Role = (typeof ROLES)[number];

/** Everyone who may read lots, packages and the ledger. Operators and stations see live releases only. */
export const READERS: readonly Role[] = ["engineer", "reviewer", "service", "auditor", "admin"];
