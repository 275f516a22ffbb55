import type { Problem } from "@/lib/errors";

/** What a refused call says: RFC 9457 problem details with a stable code. */
export interface ProblemDetails {
  code: string;
  title: string;
  status: number;
  detail?: string;
  errors?: Problem[];
}

/** A call of the API that was refused or did not get through. */
export class ApiError extends Error {
  readonly problem: ProblemDetails;

  constructor(problem: ProblemDetails) {
    super(problem.detail ?? problem.title);
    this.name = "ApiError";
    this.problem = problem;
  }
}

export interface ApiCall {
  method?: "GET" | "POST" | "PUT" | "PATCH" | "DELETE";
  /** Sent as JSON. */
  json?: unknown;
  /** Sent as it is, with its type. */
  body?: Blob | string;
  contentType?: string;
  idempotencyKey?: string;
  signal?: AbortSignal;
}

/**
 * Calls `/api/v1` from the browser and returns the JSON it answers.
 * @throws ApiError with the problem details; code `network.unreachable` where no answer came.
 */
export async function callApi<T>(path: string, call: ApiCall = {}): Promise<T> {
  const headers = new Headers({ accept: "application/json" });
  if (call.json !== undefined) headers.set("content-type", "application/json");
  else if (call.contentType) headers.set("content-type", call.contentType);
  if (call.idempotencyKey) headers.set("idempotency-key", call.idempotencyKey);
  let response: Response;
  try {
    response = await fetch(path, {
      method: call.method ?? "GET",
      headers,
      body: call.json !== undefined ? JSON.stringify(call.json) : call.body,
      signal: call.signal,
    });
  } catch (error) {
    if (error instanceof DOMException && error.name === "AbortError") throw error;
    throw new ApiError({
      code: "network.unreachable",
      status: 0,
      title: "The server does not answer",
      detail: "The server does not answer. What you entered is still here; try again when the connection is back.",
    });
  }
  if (!response.ok) throw new ApiError(await readProblem(response));
  return (response.status === 204 ? undefined : await response.json()) as T;
}

async function readProblem(response: Response): Promise<ProblemDetails> {
  const body: unknown = await response.json().catch(() => null);
  if (isProblem(body)) return { ...body, status: response.status };
  return { code: "server.fault", title: "Something went wrong here", status: response.status };
}

function isProblem(body: unknown): body is ProblemDetails {
  return typeof body === "object" && body !== null && "code" in body && "title" in body;
}

/** The problem of anything caught around a call. */
export function problemOf(error: unknown): ProblemDetails {
  if (error instanceof ApiError) return error.problem;
  return { code: "server.fault", title: "Something went wrong here", status: 0 };
}
