import type { DerivationRow } from "@/db/queries/derivations";
import { CHECK_CODES, type CheckCode, type PackageCheck } from "@/lib/domain/package-checks/check";
import { type CoverageFacts, checkCoverage } from "@/lib/domain/package-checks/coverage";
import { checkDecidedSets, type DecidedSetsFacts } from "@/lib/domain/package-checks/decided-sets";
import { checkFirmware, type FirmwareFacts } from "@/lib/domain/package-checks/firmware";
import { checkFirstOff } from "@/lib/domain/package-checks/first-off";
import { checkPooling } from "@/lib/domain/package-checks/pooling";
import { checkProvenRange } from "@/lib/domain/package-checks/proven-range";
import { checkRepeatability, type RepeatabilityFacts } from "@/lib/domain/package-checks/repeatability";
import { thresholdsOf } from "@/lib/domain/package-checks/thresholds";
import { checkVerification } from "@/lib/domain/package-checks/verification";
import type { FirstOffProof } from "@/lib/domain/proof/first-off";
import { ByteGatherer } from "./checking/byte-gatherer";
import { DifferenceGatherer, type LivePackage } from "./checking/difference-gatherer";
import { TwinGatherer } from "./checking/twin-gatherer";
import { ValueGatherer } from "./checking/value-gatherer";
import type { ComposedImage, PackageInputs } from "./compose-package";

/** What the checks want to know of a package besides its images. */
export interface WholePackage {
  coverage: CoverageFacts;
  decidedSets: Pick<DecidedSetsFacts, "notApproved">;
  firmware: Pick<FirmwareFacts, "others">;
  repeatability: Omit<RepeatabilityFacts, "devices">;
  derivations: readonly DerivationRow[];
  provenRange: readonly [number, number] | null;
  /** What proof runs of the lot show of its layout and firmware; null where none judged a device. */
  firstOff: FirstOffProof | null;
}

/**
 * Looks at every image of a package as it is composed, by what was decoded from its bytes, and gives the verdicts at the
 * end. Keeps extremes, faults, the coefficients and one prediction a device, so that 60,000 devices fit.
 */
export class PackageChecker {
  readonly #inputs: PackageInputs;
  readonly #values: ValueGatherer;
  readonly #bytes: ByteGatherer;
  readonly #twin: TwinGatherer;
  readonly #difference: DifferenceGatherer;
  /** How many devices each derivation gave the values of. */
  readonly #devicesOf = new Map<string, number>();
  #devices = 0;

  /** @param facts how many devices will be added, and what they are compared with. */
  constructor(inputs: PackageInputs, { devices, live }: { devices: number; live: LivePackage | null }) {
    const { layout, revision } = inputs;
    this.#inputs = inputs;
    this.#values = new ValueGatherer(layout, devices);
    this.#bytes = new ByteGatherer(layout);
    this.#twin = new TwinGatherer(layout, revision.document);
    this.#difference = new DifferenceGatherer(layout, live);
  }

  /** @param live bytes of the image that is live for its serial; undefined where there is none. */
  add(image: ComposedImage, live: Uint8Array | undefined): void {
    this.#devices++;
    const { derivationId } = image.set;
    this.#devicesOf.set(derivationId, (this.#devicesOf.get(derivationId) ?? 0) + 1);
    this.#values.add(image);
    this.#bytes.add(image);
    this.#twin.add(image);
    this.#difference.add(image.device.serial, image.bytes, live);
  }

  /** The verdicts, in the order in which they are told. */
  finish(whole: WholePackage): PackageCheck[] {
    const { layout, revision, pkg } = this.#inputs;
    const thresholds = thresholdsOf(revision.document);
    const { coverage, derivations, repeatability } = whole;
    const packed = this.#devices;
    const { newerUndecided, leftOut } = coverage;
    const checks: Record<CheckCode, () => PackageCheck | null> = {
      coverage: () => checkCoverage(coverage),
      "decided-sets": () => checkDecidedSets({ packed, newerUndecided, leftOut, ...whole.decidedSets }),
      firmware: () =>
        checkFirmware({ firmware: pkg.firmware, range: layout.document.firmware, packed, ...whole.firmware }),
      limits: () => this.#values.limits(),
      "round-trip": () => this.#values.roundTrip(),
      "reserved-bytes": () => this.#bytes.reservedBytes(),
      "hex-reading": () => this.#bytes.hexReading(),
      repeatability: () => checkRepeatability({ devices: packed, ...repeatability }),
      outliers: () => this.#values.outliers(thresholds.outlierScore),
      "equal-images": () => this.#bytes.equalImages(),
      pooling: () => checkPooling(derivations.flatMap(({ id, pooled }) => (pooled ? [{ id, pooled }] : []))),
      verification: () => checkVerification(derivations, revision.document.confidence),
      "proven-range": () => this.#provenRange(whole),
      twin: () => this.#twin.twin(),
      "first-off": () => checkFirstOff(whole.firstOff),
      "live-difference": () => this.#difference.liveDifference(thresholds),
    };
    return CHECK_CODES.map((code) => checks[code]()).filter((check) => check !== null);
  }

  #provenRange({ derivations, provenRange }: WholePackage): PackageCheck {
    const { temperatureMinC, temperatureMaxC } = this.#inputs.revision.document;
    const unprovenDevices = derivations
      .filter((one) => one.provenLowC === null)
      .reduce((sum, one) => sum + (this.#devicesOf.get(one.id) ?? 0), 0);
    return checkProvenRange({ temperatureMinC, temperatureMaxC, provenRange, unprovenDevices });
  }
}
