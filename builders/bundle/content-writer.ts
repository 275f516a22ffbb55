import { hexPath } from "@/builders/bundle/bundle";
import { ByteSink, type SunkBytes } from "@/builders/bundle/byte-sink";
import { HexTemplate } from "@/builders/bundle/hex-template";
import { byCodeUnits, type Manifest, manifestBytesAround } from "@/builders/bundle/manifest";
import { sha256Hex, sha256OfPieces } from "@/builders/bundle/sha256";
import { sumsTextOf } from "@/builders/bundle/sums";
import { ValuesTemplate } from "@/builders/bundle/values-template";
import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { imageDigestBytes } from "@/builders/codec/image";

/** One device's share of a package. */
export interface DeviceContent {
  serial: string;
  hardwareId: string | null;
  /** Id of the derivation that its coefficients come from. */
  derivation: string;
  image: Uint8Array;
}

/** Lower-case hex. */
export interface ImageDigests {
  /** Of the image's bytes, kept ranges taken as fill. */
  sha256: string;
  /** Of its HEX file. */
  hexSha256: string;
}

/** The files of a package beside its HEX files. */
export interface WrittenContent {
  /** `images.jsonl`. */
  values: SunkBytes;
  /** `manifest.json`. */
  manifest: Buffer;
  /** Package digest: SHA-256 of the manifest, lower-case hex. */
  digest: string;
  /** `SHA256SUMS`. */
  sums: Buffer;
}

/**
 * Writes the files of a package from one device after the other, the same bytes at every call. Keeps the text of the manifest in
 * pieces, that of the values if asked to, a line of sums a device, and no image.
 */
export class ContentWriter {
  readonly #layout: CompiledLayout;
  readonly #hex: HexTemplate;
  readonly #template: ValuesTemplate;
  readonly #values: ByteSink;
  readonly #images = new ByteSink({ keep: true });
  readonly #sums: { path: string; digest: string }[] = [];
  readonly #text: Buffer;
  #last = "";

  /** @param keepValues whether the bytes of `images.jsonl` are wanted, and not only what is told of them. */
  constructor(layout: CompiledLayout, { keepValues }: { keepValues: boolean }) {
    this.#values = new ByteSink({ keep: keepValues });
    this.#layout = layout;
    this.#hex = new HexTemplate(layout);
    this.#template = new ValuesTemplate(layout);
    this.#text = Buffer.alloc(this.#hex.length);
  }

  /** Adds a device; serials have to rise in UTF-16 code units. @throws Error where one does not */
  add({ serial, hardwareId, derivation, image }: DeviceContent): ImageDigests {
    if (serial <= this.#last) throw new Error(`${serial} after ${this.#last}: devices are added by serial`);
    this.#last = serial;
    const sha256 = sha256Hex(imageDigestBytes(this.#layout, image));
    this.#hex.write(image, this.#text, 0);
    const hexSha256 = sha256Hex(this.#text);
    this.#template.add(this.#values, { serial, derivation, sha256 }, image);
    const path = hexPath(serial);
    this.#sums.push({ path, digest: hexSha256 });
    // Members in the order of RFC 8785; serials and paths are plain ASCII.
    const board = hardwareId === null ? "null" : JSON.stringify(hardwareId);
    this.#images.addText(
      `${this.#sums.length > 1 ? "," : ""}{"bytes":${this.#layout.bytes},"hardwareId":${board},"hex":{"path":"${path}","sha256":"${hexSha256}"},"serial":"${serial}","sha256":"${sha256}"}`,
    );
    return { sha256, hexSha256 };
  }

  /** The HEX file of the device that was added last, as it was hashed. */
  lastHex(): string {
    return this.#text.toString("latin1");
  }

  /** The files, once all devices are in. @param head what the manifest says besides its images and values. */
  finish(head: Omit<Manifest, "format" | "images" | "values">): WrittenContent {
    const values = this.#values.finish();
    const whole = { ...head, values: { path: "images.jsonl", sha256: values.sha256 } };
    const manifest = manifestBytesAround(whole, this.#images.finish().pieces);
    const digest = sha256OfPieces([manifest]);
    this.#sums.push({ path: "images.jsonl", digest: values.sha256 }, { path: "manifest.json", digest });
    return { values, manifest, digest, sums: Buffer.from(sumsTextOf(this.#sums)) };
  }
}

/** True where devices stand in the order in which {@link ContentWriter} takes them. */
export function bySerial(a: { serial: string }, b: { serial: string }): number {
  return byCodeUnits(a.serial, b.serial);
}
