import { Facts } from "@/app/_components/facts";
import { crcParametersOf, findChecksumWidth, rangesOf } from "@/builders/codec/checksum-algorithm";
import { findCrcParameters } from "@/builders/codec/crc";
import { findFieldWidth } from "@/builders/codec/field-types";
import { addressAt, listSegments } from "@/builders/codec/segments";
import { formatAddress, formatByte } from "@/lib/domain/format/digest";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type {
  BitField,
  ChecksumAlgorithm,
  LayoutChecksum,
  LayoutDocument,
  LayoutField,
} from "@/schemas/documents/layout";

const dash = "—";
const hexRange = (from: number, to: number) => `${formatAddress(from)}–${formatAddress(to)}`;
const numberText = (value: number | undefined) => (value === undefined ? dash : String(value).replace("-", "−"));

/** Addresses in the device by offset of the image: one after the other, but for the jumps between segments. */
function addressesOf(memory: LayoutDocument["memory"]): (offset: number) => number {
  const segments = listSegments(memory);
  return (offset) => addressAt(segments, offset);
}

/** What holds for the memory as a whole. */
export function MemoryFacts({ document, used }: { document: LayoutDocument; used: number }) {
  const { memory, firmware, order, kept = [], reserved = [] } = document;
  const address = addressesOf(memory);
  const ranges = (list: readonly (readonly [number, number])[]) =>
    list.map(([from, to]) => hexRange(address(from), address(to))).join(", ") || "none";
  const segments = listSegments(memory);
  return (
    <Facts
      small
      facts={[
        { label: "Firmware", value: firmware },
        { label: "Order of the compensation", value: String(order) },
        { label: "Size", value: `${formatNumberOf(memory.bytes, "byte")}, ${used} in use` },
        { label: "Page", value: formatNumberOf(memory.pageBytes, "byte") },
        segments.length === 1
          ? { label: "Base address", value: formatAddress(memory.baseAddress, 8) }
          : {
              label: "Segments",
              value: segments.map((one) => hexRange(one.address, one.address + one.end - one.at - 1)).join(", "),
            },
        { label: "Fill", value: formatByte(memory.fill) },
        { label: "Byte order", value: memory.byteOrder },
        { label: "Kept by the device", value: ranges(kept) },
        { label: "Reserved", value: ranges(reserved) },
      ]}
    />
  );
}

const cell = "px-2 py-1 align-baseline";

function Heads({ names }: { names: readonly string[] }) {
  return (
    <thead>
      <tr className="border-b border-ink text-left">
        {names.map((name) => (
          <th key={name} scope="col" className={`${cell} font-semibold`}>
            {name}
          </th>
        ))}
      </tr>
    </thead>
  );
}

/** Every field by rising address: where it lies, how it is stored, what it means. */
export function FieldSheet({ document }: { document: LayoutDocument }) {
  const fields = [...document.fields].sort((a, b) => a.at - b.at);
  return (
    <section className="break-inside-auto">
      <h2 className="mb-2 text-md">Fields</h2>
      <div className="overflow-x-auto">
        <table className="w-full min-w-[840px] text-sm print:min-w-0">
          <Heads names={["Address", "Field", "Type", "Order", "Scale", "Bias", "Unit", "Limits", "Value"]} />
          <tbody>
            {fields.map((field) => (
              <FieldLine key={field.name} field={field} document={document} />
            ))}
          </tbody>
        </table>
      </div>
    </section>
  );
}

function FieldLine({ field, document: { memory } }: { field: LayoutField; document: LayoutDocument }) {
  const width = findFieldWidth(field) ?? 1;
  const at = addressesOf(memory)(field.at);
  const limits =
    field.min === undefined && field.max === undefined ? dash : `${numberText(field.min)} to ${numberText(field.max)}`;
  return (
    <tr className="border-b border-rule">
      <td className={`${cell} font-mono whitespace-nowrap`}>
        {width === 1 ? formatAddress(at) : hexRange(at, at + width - 1)}
      </td>
      <th scope="row" className={`${cell} text-left font-mono font-semibold`}>
        {field.name}
        {field.description ? (
          <span className="block font-sans font-normal text-ink-soft">{field.description}</span>
        ) : null}
      </th>
      <td className={`${cell} font-mono`}>{typeText(field)}</td>
      <td className={cell}>
        {width > 1 && field.type !== "ascii" && field.type !== "bytes" ? (field.byteOrder ?? memory.byteOrder) : dash}
      </td>
      <td className={`${cell} font-mono`}>{numberText(field.scale)}</td>
      <td className={`${cell} font-mono`}>{numberText(field.bias)}</td>
      <td className={cell}>{field.unit ?? dash}</td>
      <td className={`${cell} font-mono`}>{limits}</td>
      <td className={`${cell} font-mono wrap-anywhere`}>
        {valueText(field.value)}
        {"bits" in field.value ? <BitLines bits={field.value.bits} /> : null}
        {field.enum ? <span className="block">{namesText(field.enum)}</span> : null}
      </td>
    </tr>
  );
}

function typeText({ type, length, bits, fraction = 0, signed, count }: LayoutField): string {
  const own = type === "fixed" ? `${signed ? "signed " : ""}fixed ${bits}, ${fraction} behind the point` : type;
  const sized = length === undefined ? own : `${own} ${length}`;
  return count === undefined ? sized : `${count} × ${sized}`;
}

function valueText(value: LayoutField["value"]): string {
  if ("from" in value) return value.from;
  if ("const" in value) return `= ${Array.isArray(value.const) ? value.const.join(", ") : value.const}`;
  return "bits:";
}

function BitLines({ bits }: { bits: readonly BitField[] }) {
  return bits.map((part) => (
    <span key={part.name} className="block">
      {part.width === 1 ? `bit ${part.from}` : `bits ${part.from}–${part.from + part.width - 1}`} {part.name}:{" "}
      {valueText(part.value)}
      {part.enum ? ` (${namesText(part.enum)})` : ""}
    </span>
  ));
}

const namesText = (names: Record<string, number>) =>
  Object.entries(names)
    .map(([name, stored]) => `${stored} ${name}`)
    .join(", ");

/** Every checksum with its parameters in full, so that nobody has to look a name up. */
export function ChecksumSheet({ document: { checksums, memory } }: { document: LayoutDocument }) {
  if (checksums.length === 0) return <p className="text-sm">No checksum tells a damaged image.</p>;
  return (
    <section className="break-inside-auto">
      <h2 className="mb-2 text-md">Checksums, in the order in which they are computed</h2>
      <div className="overflow-x-auto">
        <table className="w-full min-w-[840px] text-sm print:min-w-0">
          <Heads names={["Address", "Checksum", "Covers", "Order", "Algorithm", "Parameters"]} />
          <tbody>
            {checksums.map((checksum) => (
              <ChecksumLine key={checksum.name} checksum={checksum} memory={memory} />
            ))}
          </tbody>
        </table>
      </div>
    </section>
  );
}

function ChecksumLine({ checksum, memory }: { checksum: LayoutChecksum; memory: LayoutDocument["memory"] }) {
  const { name, at, algorithm, over, byteOrder, forbid, instead } = checksum;
  const width = findChecksumWidth(algorithm) ?? 1;
  const addressOf = addressesOf(memory);
  const address = addressOf(at);
  const covered = rangesOf(over).map(([from, to]) => hexRange(addressOf(from), addressOf(to)));
  return (
    <tr className="border-b border-rule">
      <td className={`${cell} font-mono`}>
        {width === 1 ? formatAddress(address) : hexRange(address, address + width - 1)}
      </td>
      <th scope="row" className={`${cell} text-left font-mono font-semibold`}>
        {name}
      </th>
      <td className={`${cell} font-mono`}>{covered.join(", then ")}</td>
      <td className={cell}>{width > 1 ? (byteOrder ?? memory.byteOrder) : dash}</td>
      <td className={cell}>{algorithmName(algorithm)}</td>
      <td className={`${cell} font-mono`}>
        {parametersText(algorithm)}
        {forbid ? (
          <span className="block">
            never {forbid.join(", ")}
            {instead ? `; ${instead} instead` : ""}
          </span>
        ) : null}
      </td>
    </tr>
  );
}

function algorithmName(algorithm: ChecksumAlgorithm): string {
  if (typeof algorithm === "string") return algorithm;
  if ("sum" in algorithm) return `sum of all bytes, ${algorithm.sum} bits`;
  return "xor" in algorithm ? "exclusive or of all bytes" : `CRC of ${algorithm.width} bits`;
}

function parametersText(algorithm: ChecksumAlgorithm): string {
  if (typeof algorithm !== "string" && !("width" in algorithm)) {
    const { complement = "none" } = algorithm;
    return complement === "none" ? "no complement" : `${complement}’ complement`;
  }
  const found = typeof algorithm === "string" ? findCrcParameters(algorithm) : crcParametersOf(algorithm);
  if (!found) return dash;
  const { width, poly, init, refin, refout, xorout } = found;
  const hex = (value: number) =>
    (value >>> 0)
      .toString(16)
      .toUpperCase()
      .padStart(width / 4, "0");
  return `poly ${hex(poly)}, init ${hex(init)}, refin ${refin}, refout ${refout}, xorout ${hex(xorout)}`;
}
