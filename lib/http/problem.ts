import { appErrorFromDatabase } from "@/db/constraint-codes";
import { AppError, statusOf } from "@/lib/errors";

/** RFC 9457 problem details with a stable code and the facts of the refusal. */
export interface ProblemDetails {
  type: "about:blank";
  title: string;
  status: number;
  code: string;
  detail: string;
  instance: string;
  [fact: string]: unknown;
}

/** Any thrown value as an AppError; what we do not know becomes `server.fault` and is for the log only. */
export function toAppError(error: unknown): AppError {
  if (error instanceof AppError) return error;
  return appErrorFromDatabase(error) ?? new AppError("server.fault", {}, { cause: error });
}

/** Problem details of an error; `requestId` lets people quote the log's line without seeing it. */
export function problemOf(error: AppError, requestId: string): ProblemDetails {
  const { status, title } = statusOf(error.code);
  const { message, ...facts } = error.details;
  const detail = typeof message === "string" ? message : title;
  return { ...facts, type: "about:blank", title, status, code: error.code, detail, instance: `urn:uuid:${requestId}` };
}

/** The HTTP reply of an error. */
export function problemResponse(error: AppError, requestId: string): Response {
  const problem = problemOf(error, requestId);
  const headers: Record<string, string> = { "content-type": "application/problem+json", "cache-control": "no-store" };
  if (problem.status === 401) headers["www-authenticate"] = "Bearer";
  if (problem.status === 503 || problem.status === 429)
    headers["retry-after"] = String(error.details.retryAfterSeconds ?? 5);
  if (problem.status === 416) headers["content-range"] = `bytes */${error.details.length}`;
  return new Response(JSON.stringify(problem), { status: problem.status, headers });
}
