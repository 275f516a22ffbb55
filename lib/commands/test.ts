/** `npm test`: everything, from formatting to the browser; its last line is the count. */
import { existsSync, mkdirSync, readFileSync, rmSync } from "node:fs";
import { join } from "node:path";
import { ensureBuild } from "@/lib/commands/build-app";
import { passes, STATIC_STEPS } from "@/lib/commands/check";
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { plainMessage } from "@/lib/commands/command-line";
import { ensurePostgres } from "@/lib/commands/ensure-postgres";
import { runToEnd } from "@/lib/commands/run-tool";
import { joinTestServer, TEST_HOME } from "@/lib/commands/test-server";
import { ensureTestTools } from "@/lib/commands/test-tools";
import { setEnv } from "@/lib/env";

interface Count {
  passed: number;
  failed: number;
}

const FAILED_STEP: Count = { passed: 0, failed: 1 };
const PASSED_STEP: Count = { passed: 0, failed: 0 };

export default async function test(_args: string[], signal: AbortSignal): Promise<number> {
  const total: Count = { passed: 0, failed: 0 };
  const step = async (title: string, work: () => Promise<Count>) => {
    if (signal.aborted) return false;
    const startedAt = Date.now();
    const count = await work().catch((error: unknown) => {
      console.error(`${title}: ${plainMessage(error)}`);
      return FAILED_STEP;
    });
    console.log(`  ${title}: ${Math.round((Date.now() - startedAt) / 1000)} s`);
    total.passed += count.passed;
    total.failed += count.failed;
    return count.failed === 0;
  };

  await step("tools", async () => {
    await ensureTestTools({ home: TEST_HOME, signal, say: console.log });
    await ensurePostgres({ home: TEST_HOME, signal, say: console.log });
    return PASSED_STEP;
  });
  for (const quick of STATIC_STEPS) {
    await step(quick.title, async () => ((await passes(quick, signal)) ? PASSED_STEP : FAILED_STEP));
  }
  await step("unit tests", () => runProject("unit", signal));
  await step("reference tests", () => runProject("reference", signal));
  await step("tests with a database", () => runWithDatabase(step, signal));

  if (signal.aborted) total.failed += 1;
  console.log(`${total.passed} passed, ${total.failed} failed`);
  return total.failed === 0 ? 0 : 1;
}

type Step = (title: string, work: () => Promise<Count>) => Promise<boolean>;

/** One server, and one build of the app, for all that follows; what a project needs of them it finds there. */
async function runWithDatabase(step: Step, signal: AbortSignal): Promise<Count> {
  const server = await joinTestServer();
  try {
    setEnv({ TRIMWRIGHT_TEST_SERVER_URL: server.url });
    await step("generated types", async () => {
      const verify = { title: "generated types", args: [PROGRAMS.bootstrap, "codegen", "--verify"] };
      return (await passes(verify, signal)) ? PASSED_STEP : FAILED_STEP;
    });
    await step("database and API tests", () => runProject("db", signal));
    const built = await step("build", async () => {
      await ensureBuild({ signal, say: console.log });
      return PASSED_STEP;
    });
    if (built) {
      await step("fault tests", () => runProject("faults", signal));
      await step("browser tests", () => runProject("e2e", signal));
    }
    return PASSED_STEP;
  } finally {
    await server.release();
  }
}

/** Runs one of vitest's projects and reads its counts from the JSON report. */
async function runProject(project: string, signal: AbortSignal): Promise<Count> {
  console.log(`— ${project} tests`);
  const report = join(TEST_HOME, "reports", `${project}.json`);
  mkdirSync(join(TEST_HOME, "reports"), { recursive: true });
  rmSync(report, { force: true });
  const reporters = ["--reporter=default", "--reporter=json", `--outputFile.json=${report}`];
  const args = [PROGRAMS.vitest, "run", "--project", project, ...reporters];
  const result = await runToEnd(process.execPath, args, { cwd: CHECKOUT, signal, show: true });
  return countOf(existsSync(report) ? readFileSync(report, "utf8") : undefined, result.code);
}

/**
 * Counts of a report. A run that went wrong without a failed test (a file that does not load, a broken set-up, an error
 * outside a test), and a project without any test, count as one failure.
 */
export function countOf(report: string | undefined, exitCode: number): Count {
  if (report === undefined) return FAILED_STEP;
  const { numPassedTests, numFailedTests } = JSON.parse(report) as { numPassedTests: number; numFailedTests: number };
  const brokenOtherwise = numFailedTests === 0 && (exitCode !== 0 || numPassedTests === 0);
  return { passed: numPassedTests, failed: numFailedTests + (brokenOtherwise ? 1 : 0) };
}
