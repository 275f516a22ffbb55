import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { compareImages, type FieldDifference } from "@/builders/codec/difference";
import { EVIDENCE_MAX, type PackageCheck } from "@/lib/domain/package-checks/check";
import { checkLiveDifference, type FieldMoves } from "@/lib/domain/package-checks/live-difference";
import type { CheckThresholds } from "@/lib/domain/package-checks/thresholds";

/** The package that is live for the lot, as its images are read. */
export interface LivePackage {
  id: string;
  version: string;
  /** Package digest, lower-case hex. */
  digest: string;
  layout: CompiledLayout;
  images: number;
}

interface Moves extends FieldMoves {
  signFlips: string[];
}

/** Gains and their temperature coefficients, and the thermometer's slope: a device with the other sign corrects the wrong way. */
const SIGNED_SOURCES: readonly (string | null)[] = ["gain", "gainTc", "gainTc2", "tempSlope"].map(
  (name) => `coefficients.${name}`,
);

/** Compares each image with the one that is live for its serial. */
export class DifferenceGatherer {
  readonly #layout: CompiledLayout;
  readonly #live: LivePackage | null;
  readonly #fields = new Map<string, Moves>();
  /** Version numbers and checksums: they change with every package and say nothing of a value. */
  readonly #numbers: ReadonlySet<string>;
  readonly #counts = { packed: 0, added: 0, values: 0, versionOnly: 0, same: 0 };

  constructor(layout: CompiledLayout, live: LivePackage | null) {
    this.#layout = layout;
    this.#live = live;
    const numbers = layout.fields.filter(({ source }) => source !== null && /^(package|layout)\./.test(source));
    this.#numbers = new Set([...numbers, ...layout.checksums].map(({ name }) => name));
  }

  /** @param live bytes of the live image of this serial; undefined where it has none. */
  add(serial: string, bytes: Uint8Array, live: Uint8Array | undefined): void {
    this.#counts.packed++;
    if (!this.#live) return;
    if (!live) {
      this.#counts.added++;
      return;
    }
    const from = { layout: this.#live.layout, bytes: live };
    const { change, fields } = compareImages(from, { layout: this.#layout, bytes });
    this.#counts[change === "version-only" ? "versionOnly" : change]++;
    if (change !== "values") return;
    for (const field of fields) if (!this.#numbers.has(field.name)) this.#addMove(serial, field);
  }

  #addMove(serial: string, { name, unit, from, to, steps }: FieldDifference): void {
    const moves = this.#fields.get(name) ?? this.#newMoves(name, unit);
    moves.devices++;
    if (typeof from !== "number" || typeof to !== "number") return;
    const known = moves.largest ? Math.abs(moves.largest.to - moves.largest.from) : -1;
    if (Math.abs(to - from) > known) moves.largest = { serial, from, to, steps };
    if (from * to < 0) moves.signFlips.push(serial);
  }

  #newMoves(name: string, unit: string | null): Moves {
    const field = this.#layout.fields.find((one) => one.name === name);
    const room = field ? field.max - field.min : Number.NaN;
    const moves: Moves = {
      name,
      unit,
      devices: 0,
      largest: null,
      room: Number.isFinite(room) ? room : null,
      signFlips: [],
      signMatters: SIGNED_SOURCES.includes(field?.source ?? null),
    };
    this.#fields.set(name, moves);
    return moves;
  }

  liveDifference(thresholds: CheckThresholds): PackageCheck {
    const { packed, added, values, versionOnly, same } = this.#counts;
    const removed = this.#live ? this.#live.images - (values + versionOnly + same) : 0;
    const { differenceShareWarn, differenceStepWarn, signFlipsWarn } = thresholds;
    const live = this.#live && { id: this.#live.id, version: this.#live.version, digest: this.#live.digest };
    return checkLiveDifference({
      live,
      packed,
      added,
      removed,
      values,
      versionOnly,
      same,
      fields: [...this.#fields.values()].slice(0, EVIDENCE_MAX),
      thresholds: { differenceShareWarn, differenceStepWarn, signFlipsWarn },
    });
  }
}
