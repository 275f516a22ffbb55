/**
 * The one error class of the product and the table that turns a code into an HTTP status and a title.
 * Codes are `noun.reason`; `details` carries the facts (serial, field, value, limit) and never free text from outside.
 */

/** Statuses of codes whose noun does not matter. */
const STATUS_BY_REASON: Record<string, { status: number; title: string }> = {
  not_found: { status: 404, title: "Not found" },
  exists: { status: 409, title: "Already exists" },
  wrong_state: { status: 409, title: "Not possible in this state" },
  self_approval: { status: 403, title: "A second person has to decide" },
  changed: { status: 409, title: "Changed in the meantime" },
};

/** Statuses of single codes. A code missing here and above is a 422. */
const STATUS_BY_CODE: Record<string, { status: number; title: string }> = {
  "auth.required": { status: 401, title: "Sign in first" },
  "auth.forbidden": { status: 403, title: "Your role may not do this" },
  "auth.session_required": { status: 403, title: "Needs a signed-in person in a browser" },
  "auth.sign_in_failed": { status: 401, title: "Not signed in" },
  "auth.code_required": { status: 401, title: "A one-time code is needed" },
  "auth.password_wrong": { status: 403, title: "The password is wrong" },
  "auth.code_wrong": { status: 403, title: "The one-time code is wrong" },
  "auth.origin_mismatch": { status: 403, title: "The request came from another site" },
  "auth.too_many_attempts": { status: 429, title: "Too many attempts" },
  "request.too_large": { status: 413, title: "Too large" },
  "request.invalid": { status: 422, title: "The request is not valid" },
  "request.malformed": { status: 400, title: "The request cannot be read" },
  "request.not_acceptable": { status: 406, title: "That format is not offered" },
  "request.unsupported_type": { status: 415, title: "That content type is not taken" },
  "request.cut_short": { status: 400, title: "The upload ended early" },
  "request.range_invalid": { status: 416, title: "That range is not there" },
  "idempotency.key_reused": { status: 422, title: "The same key with another body" },
  "idempotency.in_progress": { status: 409, title: "The same request is still running" },
  "device.in_other_lot": { status: 409, title: "The serial belongs to another lot" },
  "device.batch_differs": { status: 409, title: "Another batch was told before" },
  "run.duplicate": { status: 409, title: "The same bytes were uploaded before" },
  "run.already_superseded": { status: 409, title: "That run was superseded before" },
  "run.no_proof": { status: 409, title: "Not a proof run" },
  "run.too_many_rows": { status: 413, title: "Too many rows" },
  "layout.draft_changed": { status: 409, title: "Somebody else saved this draft" },
  "layout.unfinished": { status: 409, title: "The draft has errors still" },
  "layout.not_published": { status: 409, title: "The layout is not published" },
  "layout.firmware_mismatch": { status: 409, title: "The layout is not for the lot's firmware" },
  "package.nothing_approved": { status: 409, title: "No approved coefficients to pack" },
  "package.check_failed": { status: 409, title: "A check failed" },
  "package.not_waived": { status: 409, title: "A warning has no waiver" },
  "package.live_changed": { status: 409, title: "Another release went live meanwhile" },
  "package.sets_lapsed": { status: 409, title: "Coefficients were withdrawn meanwhile" },
  "package.not_released": { status: 409, title: "Not released" },
  "package.not_built": { status: 409, title: "Not built" },
  "package.bytes_differ": { status: 500, title: "The package cannot be written as it was built" },
  "package.withdrawn": { status: 410, title: "Withdrawn" },
  "derivation.hard_finding": { status: 409, title: "A finding blocks approval" },
  "derivation.not_acknowledged": { status: 409, title: "A finding is not acknowledged" },
  "derivation.running": { status: 409, title: "Still being computed" },
  "coefficients.reference_differs": { status: 409, title: "Reference temperature or capacity differ" },
  "reinstatement.already_live": { status: 409, title: "That release is live" },
  "reinstatement.withdrawn": { status: 409, title: "That release was withdrawn" },
  "reinstatement.blocked": { status: 409, title: "A check stands against it" },
  "family.no_published_revision": { status: 409, title: "The family has no published revision" },
  "station.family_not_allowed": { status: 403, title: "Not one of this station's families" },
  "station.package_not_live": { status: 409, title: "That package is not live" },
  "person.own_roles": { status: 403, title: "Nobody changes their own roles" },
  "person.own_account": { status: 403, title: "Another admin has to do this" },
  "person.second_admin_needed": { status: 409, title: "A second admin has to confirm" },
  "password.not_accepted": { status: 422, title: "Take another password" },
  "key.too_many": { status: 409, title: "Too many keys" },
  "link.used": { status: 410, title: "That link was used" },
  "link.expired": { status: 410, title: "That link has run out" },
  "database.unavailable": { status: 503, title: "The database does not answer" },
  "server.fault": { status: 500, title: "Something went wrong here" },
};

export type ErrorDetails = Record<string, unknown>;

/** A refusal or fault with a stable code. @see statusOf for what a client gets. */
export class AppError extends Error {
  readonly code: string;
  readonly details: ErrorDetails;

  /**
   * @param code `noun.reason`, stable for ever.
   * @param details facts that say what to mend; `message` is used as the sentence for people.
   */
  constructor(code: string, details: ErrorDetails = {}, options?: { cause?: unknown }) {
    super(typeof details.message === "string" ? details.message : code, options);
    this.name = "AppError";
    this.code = code;
    this.details = details;
  }
}

/** HTTP status and title for a code. */
export function statusOf(code: string): { status: number; title: string } {
  const reason = code.slice(code.indexOf(".") + 1);
  return STATUS_BY_CODE[code] ?? STATUS_BY_REASON[reason] ?? { status: 422, title: "Not accepted" };
}

/** One thing wrong in a document, a request or a row; `path` is a JSON pointer, or a field's name. */
export interface Problem {
  path: string;
  code: string;
  message: string;
}
