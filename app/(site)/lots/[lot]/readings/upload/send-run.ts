import { ApiError, type ProblemDetails } from "@/app/_components/api-client";
import type { FindingView } from "@/schemas/api/runs";

export interface Uploaded {
  id: string;
  rows: number;
  devices: number;
  added: number;
  staleSets: number;
  findings: FindingView[];
}

export interface Sending {
  result: Promise<Uploaded>;
  /** Ends it; the result is then a refusal with code `upload.stopped`. */
  abort: () => void;
}

/**
 * Sends a run. `XMLHttpRequest`, because `fetch` tells nothing about how far an upload is.
 * @param onSent gets the share of the bytes that left, 0 to 1; at 1 the server checks and stores.
 */
export function sendRun(path: string, body: Blob, onSent: (share: number) => void): Sending {
  const request = new XMLHttpRequest();
  const result = new Promise<Uploaded>((resolve, reject) => {
    const refuse = (problem: ProblemDetails) => reject(new ApiError(problem));
    request.upload.addEventListener("progress", ({ loaded, total }) => onSent(total > 0 ? loaded / total : 0));
    request.upload.addEventListener("load", () => onSent(1));
    request.addEventListener("load", () => {
      const reply = jsonOf(request.responseText);
      if (request.status === 201) resolve(reply as Uploaded);
      else
        refuse({
          code: "server.fault",
          title: "Something went wrong here",
          ...(reply as object),
          status: request.status,
        });
    });
    request.addEventListener("error", () => refuse(UNREACHABLE));
    request.addEventListener("abort", () => refuse({ code: "upload.stopped", title: "Stopped", status: 0 }));
  });
  request.open("POST", path);
  request.setRequestHeader("accept", "application/json");
  request.setRequestHeader("content-type", "text/csv");
  request.send(body);
  return { result, abort: () => request.abort() };
}

const UNREACHABLE: ProblemDetails = {
  code: "network.unreachable",
  status: 0,
  title: "The server does not answer",
  detail:
    "The connection was lost. Your file and all that you chose is still here; look above whether the run arrived, else send it again.",
};

function jsonOf(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return {};
  }
}
