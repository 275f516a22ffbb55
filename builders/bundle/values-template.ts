import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { decodeField } from "@/builders/codec/decode-field";
import { type DecodedField, decodeImage } from "@/builders/codec/image";
import { readUnsigned } from "@/builders/codec/stored-integer";

const hexDigits = (place: 0 | 1) =>
  Uint8Array.from({ length: 256 }, (_, byte) => byte.toString(16).padStart(2, "0").charCodeAt(place));
const HIGH = hexDigits(0);
const LOW = hexDigits(1);

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

  /** The line of a device. @param image of the layout's length. @throws AppError `image.wrong_length` */
  line(device: { serial: string; derivation: string; sha256: string }, image: Uint8Array): ValuesLine {
    this.#learn(image);
    const values = this.#valuesOf(image);
    const head = `{"derivation":"${device.derivation}","fields":[`;
    const tail = `],"serial":"${device.serial}","sha256":"${device.sha256}"}\n`;
    let room = this.#room + head.length + tail.length;
    for (const value of values) room += 3 * value.length;
    return { room, write: (target, at) => this.#write(target, at, image, { head, values, tail }) };
  }

  /** The values of the changing fields, canonical. */
  #valuesOf(image: Uint8Array): string[] {
    const view = new DataView(image.buffer, image.byteOffset, image.byteLength);
    const { fields, checksums } = this.#changing;
    const values: string[] = [];
    for (const field of fields) values.push(valueText(decodeField(field, image, view)));
    for (const { at, width, littleEndian } of checksums) values.push(`${readUnsigned(image, at, width, littleEndian)}`);
    return values;
  }

  #write(
    target: Buffer,
    from: number,
    image: Uint8Array,
    texts: { head: string; values: string[]; tail: string },
  ): number {
    let at = writeText(target, from, texts.head);
    for (let i = 0; i < this.#steps.length; i++) {
      const { before, part, middle } = this.#steps[i] as Step;
      target.set(before, at);
      at += before.length;
      for (let byte = part.at; byte < part.end; byte++) {
        target[at++] = HIGH[image[byte] as number] as number;
        target[at++] = LOW[image[byte] as number] as number;
      }
      target.set(middle, at);
      at += middle.length;
      at = writeText(target, at, texts.values[i] as string);
    }
    target.set(this.#after, at);
    at += this.#after.length;
    return writeText(target, at, texts.tail) - from;
  }

  /** Notes which fields this image holds otherwise than the first one. */
  #learn(image: Uint8Array): void {
    const first = this.#first;
    let learnt = !first;
    if (!first) this.#first = image.slice();
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
        before += `${part.head}${raw}${part.middle}${valueText(value)}}`;
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

/** A line that waits to be written: at most `room` bytes. */
export interface ValuesLine {
  room: number;
  /** @returns bytes written. */
  write: (target: Buffer, at: number) => number;
}

/** Writes a text as UTF-8; short ones of ASCII byte by byte, which takes less time than a call into the runtime. @returns the place after it */
function writeText(target: Buffer, from: number, text: string): number {
  for (let i = 0; i < text.length; i++) {
    const unit = text.charCodeAt(i);
    if (unit > 0x7f) return from + target.write(text, from);
    target[from + i] = unit;
  }
  return from + text.length;
}

/** A finite number in a template is its text of RFC 8785, at a fraction of what JSON.stringify takes for one. */
function valueText(value: DecodedField["value"]): string {
  return typeof value === "number" ? `${value}` : JSON.stringify(value);
}
