import { AppError } from "@/lib/errors";
import { type FittedDevice, fitDevice, isBlocked } from "./device-fit";
import { trimDevice } from "./device-gain";
import { assertFamilyRules } from "./envelope";
import { makeFinding } from "./findings";
import { verdictOf } from "./judge";
import { poolGain, SAMPLE_MIN } from "./pooled";
import { provenRange } from "./proven-range";
import { listRunFindings } from "./run-findings";
import { collectDevices, listTwiceMeasured, selectRuns } from "./run-selection";
import { shareShown } from "./share-shown";
import { checkSiblings } from "./sibling-checks";
import type {
  DerivationInput,
  DerivationResult,
  FamilyRules,
  Finding,
  GainCoefficients,
  PooledResult,
  VerificationResult,
} from "./types";

/**
 * Version of this arithmetic. It enters a derivation's digest: raise it with any change that can move a coefficient, a
 * verdict or a finding.
 */
export const COMPENSATION_ENGINE = "2";

/** Marks the excluded and names exclusions that fit no device. */
function exclude(devices: readonly FittedDevice[], { exclude: exclusions }: DerivationInput): Finding[] {
  const bySerial = new Map(devices.map((device) => [device.result.serial, device.result]));
  const unknown: Finding[] = [];
  for (const { serial, reason } of exclusions) {
    const result = bySerial.get(serial);
    if (!result) unknown.push(makeFinding("exclusion.unknown_serial", { data: { serial, reason } }));
    else if (result.role !== "excluded") {
      // What would forbid coefficients is of no weight for a device that gets none.
      const wouldBe = result.findings.filter((finding) => finding.severity === "hard").map((finding) => finding.code);
      const data = { reason, role: result.role, ...(wouldBe.length > 0 && { wouldBe }) };
      result.findings = [makeFinding("device.excluded", { serial, data })];
      result.role = "excluded";
    }
  }
  return unknown;
}

/** The lot's gain from the sample devices that are not excluded, with the findings on the sample. */
function pool(
  devices: readonly FittedDevice[],
  { family, order }: DerivationInput,
  findings: Finding[],
): PooledResult | null {
  const sample = devices.filter(({ result, trim }) => result.role === "sample" && trim && !isBlocked(result));
  const trims = sample.map(({ trim }) => trim?.coefficients as GainCoefficients);
  const pooled = poolGain(trims, order, family);
  const n = trims.length;
  if (n < SAMPLE_MIN) findings.push(makeFinding("sample.too_small", { data: { n, needed: SAMPLE_MIN } }));
  if (pooled?.verdict === "outside") {
    const { limit, coverage, confidence, toleranceFactor, sd } = pooled;
    const data = { limit, coverage, confidence, halfWidth: (toleranceFactor ?? 0) * (sd ?? 0) };
    findings.push(makeFinding("pooled.limit_exceeded", { data }));
  }
  return pooled;
}

/** Compares the devices that were not excluded with each other. */
function siblingFindings(devices: readonly FittedDevice[], { method, family }: DerivationInput): Finding[] {
  const pooled = method === "pooled-gain";
  const included = devices.filter(({ result }) => result.role !== "excluded" && !isBlocked(result));
  const trimmed = included.filter(({ result, trim }) => trim && (!pooled || result.role === "sample"));
  const results = (list: readonly FittedDevice[]) => list.map(({ result }) => result);
  return checkSiblings(results(included), results(trimmed), pooled, family);
}

/** What the verification devices prove about a pooled gain; a failure counts whatever the method. */
function verificationFindings(verification: readonly VerificationResult[], input: DerivationInput): Finding[] {
  const findings: Finding[] = [];
  const judged = verification.filter((device) => device.passed !== null);
  const failed = judged.filter((device) => device.passed === false).map((device) => device.serial);
  if (failed.length > 0) {
    const data = { failed: failed.length, judged: judged.length, serials: failed };
    findings.push(makeFinding("verification.failed", { data }));
  }
  if (input.method === "individual") return findings;
  if (verification.length === 0) findings.push(makeFinding("verification.missing"));
  const open = verification.filter((device) => device.passed === null).map((device) => device.serial);
  if (open.length > 0)
    findings.push(makeFinding("verification.not_judged", { data: { count: open.length, serials: open } }));
  if (judged.length > 0 && failed.length === 0) {
    const { confidence } = input.family;
    const data = { passed: judged.length, share: shareShown(judged.length, confidence), confidence };
    findings.push(makeFinding("verification.share_shown", { data }));
  }
  return findings;
}

/** One note for all devices whose zero fit has no point to spare. */
function freedomFindings(devices: readonly FittedDevice[]): Finding[] {
  const count = devices.filter(({ zero, result }) => result.coefficients && zero?.degreesOfFreedom === 0).length;
  return count > 0 ? [makeFinding("fit.no_freedom", { data: { devices: count } })] : [];
}

function rangeFindings(range: [number, number] | null, common: boolean, family: FamilyRules): Finding[] {
  if (!range) return [];
  const { temperatureMinC, temperatureMaxC } = family;
  const [low, high] = range;
  const findings = common ? [] : [makeFinding("range.none_common")];
  if (low > temperatureMinC || high < temperatureMaxC)
    findings.push(makeFinding("range.not_proven", { data: { low, high, temperatureMinC, temperatureMaxC } }));
  return findings;
}

/**
 * Coefficients of a lot from its runs, as the contract's section 3 states it: the same input gives the same result.
 * What can't be computed for one device is a hard finding on that device; the rest of the lot goes on.
 * Findings of the runs used stand among the lot's findings, with the run's id in `data.run`.
 * @throws AppError `family.invalid`, `derivation.no_readings`, `run.serial_repeated` {serial, purpose, runs},
 * `reading.loaded_without_unloaded` {serial, point, row}.
 */
export function derive(input: DerivationInput): DerivationResult {
  const { family, method, order } = input;
  assertFamilyRules(family);
  const { used, findings } = selectRuns(input.runs);
  const records = collectDevices(used, family.capacityKg);
  if (records.length === 0) throw new AppError("derivation.no_readings", { runs: input.runs.map((run) => run.id) });
  for (const run of used)
    for (const finding of listRunFindings(family, run.purpose, run.readings))
      findings.push({ ...finding, data: { ...finding.data, run: run.id } });

  findings.push(...listTwiceMeasured(records));
  const devices = records.map((record) => fitDevice(record, family, order));
  findings.push(...exclude(devices, input));
  const pooled = method === "pooled-gain" ? pool(devices, input, findings) : null;
  if (method === "individual" || pooled)
    for (const device of devices)
      if (device.result.role !== "excluded" && !isBlocked(device.result))
        trimDevice(device, pooled ?? undefined, family, order);
  findings.push(...siblingFindings(devices, input));

  const results = devices.map(({ result }) => result);
  const verification = results.filter(({ role }) => role === "verification").map(verdictOf);
  const { range, common } = provenRange(devices, method);
  findings.push(
    ...verificationFindings(verification, input),
    ...freedomFindings(devices),
    ...rangeFindings(range, common, family),
  );
  return { devices: results, pooled, verification, findings, provenRange: range, engine: COMPENSATION_ENGINE };
}
