/** Runs a program of the system to its end and turns its failure into one plain line. */
import { spawn } from "node:child_process";
import { childEnv } from "@/lib/env";
import { AppError } from "@/lib/errors";

export interface ToolOptions {
  cwd?: string;
  env?: NodeJS.ProcessEnv;
  /** Ends the program with SIGTERM. */
  signal?: AbortSignal;
  /** Show the program's output as it comes; otherwise it is only kept for the error. */
  show?: boolean;
}

export interface ToolResult {
  code: number;
  /** Standard output; empty when shown. */
  stdout: string;
  /** Standard error; empty when shown. */
  stderr: string;
}

/**
 * Runs the program and returns however it ended.
 * @throws AppError `command.not_found` {program}; `command.stopped` when the signal ended it.
 */
export function runToEnd(program: string, args: string[], options: ToolOptions = {}): Promise<ToolResult> {
  const stopped = () => new AppError("command.stopped", { program, message: "Stopped" });
  return new Promise((resolve, reject) => {
    if (options.signal?.aborted) return reject(stopped());
    const child = spawn(program, args, {
      cwd: options.cwd,
      env: options.env ?? childEnv({}),
      stdio: options.show === true ? ["ignore", "inherit", "inherit"] : ["ignore", "pipe", "pipe"],
    });
    const out = { stdout: "", stderr: "" };
    child.stdout?.setEncoding("utf8").on("data", (text: string) => (out.stdout += text));
    child.stderr?.setEncoding("utf8").on("data", (text: string) => (out.stderr += text));
    const stop = () => child.kill("SIGTERM");
    options.signal?.addEventListener("abort", stop, { once: true });
    child.once("error", (error: NodeJS.ErrnoException) =>
      reject(
        error.code === "ENOENT"
          ? new AppError("command.not_found", { program, message: `${program} is not there` })
          : error,
      ),
    );
    child.once("close", (code) => {
      options.signal?.removeEventListener("abort", stop);
      if (options.signal?.aborted) reject(stopped());
      else resolve({ code: code ?? 1, ...out });
    });
  });
}

/**
 * Runs the program and insists on success.
 * @returns its standard output.
 * @throws AppError `command.failed` {program, code} with the line of its output that tells most.
 */
export async function runTool(program: string, args: string[], options: ToolOptions = {}): Promise<string> {
  const result = await runToEnd(program, args, options);
  if (result.code === 0) return result.stdout;
  const reason = tellingLine(`${result.stdout}\n${result.stderr}`);
  throw new AppError("command.failed", {
    program,
    code: result.code,
    message: `${program} failed${reason === "" ? ` with code ${result.code}` : `: ${reason}`}`,
  });
}

/** The first line that names an error, or else the last one. */
export function tellingLine(output: string): string {
  const lines = output
    .split("\n")
    .map((line) => line.trim())
    .filter((line) => line !== "");
  return (
    lines.find((line) => /no space left/i.test(line)) ??
    lines.find((line) => /^(E:|.*\b(error|fatal|failed|unable)\b)/i.test(line)) ??
    lines.at(-1) ??
    ""
  );
}
