import { findReadDifference } from "@/builders/bundle/independent-read";
import { sha256Hex } from "@/builders/bundle/sha256";
import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { assembleImage } from "@/builders/codec/files/hex-image";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { rangesBetween } from "@/builders/codec/memory-map";
import { EVIDENCE_MAX, type PackageCheck } from "@/lib/domain/package-checks/check";
import { checkEqualImages } from "@/lib/domain/package-checks/equal-images";
import { checkHexReading, type HexFault } from "@/lib/domain/package-checks/hex-reading";
import { checkReservedBytes, type ReservedFault } from "@/lib/domain/package-checks/reserved-bytes";
import { AppError } from "@/lib/errors";
import type { ByteRange } from "@/schemas/documents/layout";
import type { ComposedImage } from "../compose-package";

/** Gathers what the bytes themselves say: as readers of the HEX file see them, where nothing should be, and against each other. */
export class ByteGatherer {
  readonly #layout: CompiledLayout;
  readonly #reserved: ByteRange[];
  readonly #reservedFaults: ReservedFault[] = [];
  #reservedCount = 0;
  readonly #hexFaults: HexFault[] = [];
  #hexCount = 0;
  /** Stretches that tell devices apart by name and not by value: serials and checksums. */
  readonly #names: ByteRange[];
  /** First serial of each content, and all of those that came up again. */
  readonly #firstOf = new Map<string, string>();
  readonly #groups = new Map<string, string[]>();
  #devices = 0;

  constructor(layout: CompiledLayout) {
    this.#layout = layout;
    const extent = ({ at, width }: { at: number; width: number }): ByteRange => [at, at + width - 1];
    this.#reserved = rangesBetween([...layout.fields, ...layout.checksums].map(extent), layout.bytes);
    const serials = layout.fields.filter((field) => field.source === "device.serial");
    this.#names = [...serials, ...layout.checksums].map(extent);
  }

  add({ device: { serial }, hex, bytes }: ComposedImage): void {
    this.#devices++;
    this.#addReserved(serial, bytes);
    this.#addContent(serial, bytes);
    this.#addReading("intel-hex", serial, () => findReadDifference(hex, bytes, this.#layout));
    this.#addReading("strict", serial, () => this.#findStrictDifference(hex, bytes));
  }

  #addReserved(serial: string, bytes: Uint8Array): void {
    for (const [from, to] of this.#reserved) {
      for (let at = from; at <= to; at++) {
        const byte = bytes[at] as number;
        if (byte === this.#layout.fill) continue;
        this.#reservedCount++;
        if (this.#reservedFaults.length < EVIDENCE_MAX) this.#reservedFaults.push({ serial, at, byte });
      }
    }
  }

  #addContent(serial: string, bytes: Uint8Array): void {
    const content = new Uint8Array(bytes);
    for (const [from, to] of this.#names) content.fill(0, from, to + 1);
    const key = sha256Hex(content);
    const first = this.#firstOf.get(key);
    if (first === undefined) this.#firstOf.set(key, serial);
    else this.#groups.set(key, [...(this.#groups.get(key) ?? [first]), serial]);
  }

  #addReading(reader: HexFault["reader"], serial: string, findDifference: () => number | undefined): void {
    try {
      const at = findDifference();
      if (at !== undefined) this.#addHexFault({ serial, reader, at, reason: `byte ${at} differs` });
    } catch (error) {
      if (!(error instanceof AppError)) throw error;
      this.#addHexFault({ serial, reader, at: null, reason: error.message });
    }
  }

  #addHexFault(fault: HexFault): void {
    this.#hexCount++;
    if (this.#hexFaults.length < EVIDENCE_MAX) this.#hexFaults.push(fault);
  }

  #findStrictDifference(hex: string, bytes: Uint8Array): number | undefined {
    const read = assembleImage(this.#layout, readIntelHex(hex).segments);
    const [outside] = read.outside;
    if (outside) throw new AppError("hex.outside_memory", { message: `address ${outside.address} is not the image's` });
    if (read.missing[0]) return read.missing[0][0];
    const at = bytes.findIndex((byte, i) => read.bytes[i] !== byte);
    return at >= 0 ? at : undefined;
  }

  reservedBytes(): PackageCheck {
    const { fill } = this.#layout;
    const faults = { faults: this.#reservedFaults, faultCount: this.#reservedCount };
    return checkReservedBytes({ devices: this.#devices, ranges: this.#reserved, fill, ...faults });
  }

  hexReading(): PackageCheck {
    return checkHexReading({ devices: this.#devices, faults: this.#hexFaults, faultCount: this.#hexCount });
  }

  equalImages(): PackageCheck {
    return checkEqualImages({ devices: this.#devices, groups: [...this.#groups.values()] });
  }
}
