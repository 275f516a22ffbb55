import type { ByteSink } from "@/builders/bundle/byte-sink";
import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { decodeField } from "@/builders/codec/decode-field";
import { type DecodedField, decodeImage } from "@/builders/codec/image";
import { readUnsigned } from "@/builders/codec/stored-integer";

const hexDigits = (place: 0 | 1) =>
  Uint8Array.from({ length: 256 }, (_, byte) => byte.toString(16).padStart(2, "0").charCodeAt(place));
const HIGH = hexDigits(0);
const LOW = hexDigits(1);

const QUOTE = 0x22;
const COMMA = 0x2c;
const BACKSLASH = 0x5c;

/** What stands around the fields of a line and the texts that are told there. */
const DERIVATION = Buffer.from('{"derivation":"');
const FIELDS = Buffer.from('","fields":[');
const SERIAL = Buffer.from('],"serial":"');
const SHA256 = Buffer.from('","sha256":"');
const END = Buffer.from('"}\n');
const AROUND_BYTES = [DERIVATION, FIELDS, SERIAL, SHA256, END].reduce((sum, { length }) => sum + length, 0);

/** A field or a checksum, with the canonical text in front of its raw bytes and between these and its value. */
interface Part {
  index: number;
  at: number;
  end: number;
  head: string;
  middle: string;
}

/** Text that stays the same from image to image, then one field that does not. */
interface Step {
  before: Buffer;
  part: Part;
  middle: Buffer;
}

/**
 * Lines of `images.jsonl` (RFC 8785, with the LF that ends each) for one image of a layout after the other. Most fields of a
 * package hold the same in every image: their text is kept, and only fields that were seen to change are decoded and written.
 */
export class ValuesTemplate {
  readonly #layout: CompiledLayout;
  readonly #parts: Part[];
  readonly #changes: boolean[];
  /** What unchanging fields hold. */
  #first: Uint8Array | undefined;
  #steps: Step[] = [];
  #after = Buffer.alloc(0);
  /** Bytes of a line's fields without their values. */
  #room = 0;
  /** Where values are written before they are put in their places. */
  #list = Buffer.alloc(0);
  /** The layout with its changing fields alone. */
  #changing: CompiledLayout;

  constructor(layout: CompiledLayout) {
    this.#layout = layout;
    this.#changing = layout;
    const placed = [...layout.fields, ...layout.checksums];
    // Names, places and units are the layout's: any image tells them.
    this.#parts = decodeImage(layout, new Uint8Array(layout.bytes)).map(({ at, name, unit }, index) => ({
      index,
      at,
      end: at + (placed[index]?.width ?? 0),
      head: `${index > 0 ? "," : ""}{"at":${at},"name":${JSON.stringify(name)},"raw":"`,
      middle: `","unit":${JSON.stringify(unit)},"value":`,
    }));
    this.#changes = this.#parts.map(() => false);
  }

  /** Adds the line of a device to `sink`. @param image of the layout's length. @throws AppError `image.wrong_length` */
  add(sink: ByteSink, device: { serial: string; derivation: string; sha256: string }, image: Uint8Array): void {
    this.#learn(image);
    const values = this.#valuesOf(image);
    const { serial, derivation, sha256 } = device;
    const around = AROUND_BYTES + derivation.length + serial.length + sha256.length;
    const target = sink.reserve(this.#room + around + values.length);
    const from = sink.place;
    let at = writeTold(target, from, DERIVATION, derivation);
    target.set(FIELDS, at);
    at += FIELDS.length;
    let listed = 1;
    for (const { before, part, middle } of this.#steps) {
      target.set(before, at);
      at += before.length;
      for (let byte = part.at; byte < part.end; byte++) {
        target[at++] = HIGH[image[byte] as number] as number;
        target[at++] = LOW[image[byte] as number] as number;
      }
      target.set(middle, at);
      at += middle.length;
      const end = copyValue(values, listed, target, at);
      at += end - listed;
      listed = end + 1;
    }
    target.set(this.#after, at);
    at += this.#after.length;
    at = writeTold(target, at, SERIAL, serial);
    at = writeTold(target, at, SHA256, sha256);
    target.set(END, at);
    sink.advance(at + END.length - from);
  }

  /** The values of the changing fields as a JSON list in UTF-8: one call for all of them takes half the time of one each. */
  #valuesOf(image: Uint8Array): Buffer {
    const view = new DataView(image.buffer, image.byteOffset, image.byteLength);
    const { fields, checksums } = this.#changing;
    const values: DecodedField["value"][] = [];
    for (const field of fields) values.push(decodeField(field, image, view));
    for (const { at, width, littleEndian } of checksums) values.push(readUnsigned(image, at, width, littleEndian));
    const text = JSON.stringify(values);
    // A UTF-16 unit takes at most three bytes.
    if (this.#list.length < 3 * text.length) this.#list = Buffer.allocUnsafe(6 * text.length);
    return this.#list.subarray(0, this.#list.write(text));
  }

  /** Notes which fields this image holds otherwise than the first one. */
  #learn(image: Uint8Array): void {
    const first = this.#first;
    let learnt = !first;
    if (!first) this.#first = new Uint8Array(image);
    for (const { index, at, end } of this.#parts) {
      if (!first || this.#changes[index]) continue;
      for (let i = at; i < end; i++) if (image[i] !== first[i]) this.#changes[index] = learnt = true;
    }
    if (learnt) this.#settle();
  }

  /** Makes steps of what is known to change and of the text between. */
  #settle(): void {
    const told = decodeImage(this.#layout, this.#first as Uint8Array);
    const fields = this.#layout.fields.length;
    this.#steps = [];
    let before = "";
    this.#parts.forEach((part, i) => {
      const { raw, value } = told[i] as DecodedField;
      if (!this.#changes[i]) {
        before += `${part.head}${raw}${part.middle}${JSON.stringify(value)}}`;
        return;
      }
      this.#steps.push({ before: Buffer.from(before + part.head), part, middle: Buffer.from(part.middle) });
      before = "}";
    });
    this.#after = Buffer.from(before);
    this.#room = this.#after.length;
    for (const step of this.#steps) {
      this.#room += step.before.length + 2 * (step.part.end - step.part.at) + step.middle.length;
    }
    this.#changing = {
      ...this.#layout,
      fields: this.#layout.fields.filter((_, i) => this.#changes[i]),
      checksums: this.#layout.checksums.filter((_, i) => this.#changes[fields + i]),
    };
  }
}

/**
 * Copies the value that begins at `from` in a JSON list of texts, numbers and nulls.
 * @returns where it ends in the list.
 */
function copyValue(list: Uint8Array, from: number, target: Uint8Array, at: number): number {
  let i = from;
  let place = at;
  if (list[i] === QUOTE) {
    target[place++] = list[i++] as number;
    for (; list[i] !== QUOTE; i++) {
      if (list[i] === BACKSLASH) target[place++] = list[i++] as number;
      target[place++] = list[i] as number;
    }
  }
  for (; list[i] !== COMMA && i < list.length - 1; i++) target[place++] = list[i] as number;
  return i;
}

/** Writes what stands in front of a text of plain ASCII, and the text. @returns the place after it */
function writeTold(target: Buffer, at: number, before: Buffer, text: string): number {
  target.set(before, at);
  return at + before.length + target.write(text, at + before.length, "latin1");
}
