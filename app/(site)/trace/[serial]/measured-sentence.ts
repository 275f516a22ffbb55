import { formatFigure } from "@/lib/domain/format/figure";
import type { DeviceOrigin } from "@/lib/services/trace/get-device-origin";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";

type Derived = Pick<DerivedDeviceDetail, "points" | "role" | "gainFrom">;

/** How a device was measured and what of its coefficients is its own, in words. */
export function measuredSentence(origin: Pick<DeviceOrigin, "derivation">, derived: Derived | null): string {
  const { method, provenRange } = origin.derivation;
  if (method === "import") return "The coefficients were imported; what they were measured from is not known here.";
  const measured =
    derived && derived.points.length > 0
      ? `Measured: ${pointsText(derived.points)}.`
      : "It has no readings of its own.";
  const proven = provenRange
    ? ` Proven from ${formatFigure(provenRange[0], { digits: 1 })} to ${formatFigure(provenRange[1], { digits: 1 })} °C.`
    : "";
  return `${measured} ${gainText(method, derived)}${proven}`;
}

function gainText(method: string, derived: Derived | null): string {
  if (method === "individual") return "Gain and zero are trimmed from its own readings.";
  if (derived?.gainFrom === "sample-mean")
    return "It was never loaded: its gain is the mean of the sample, and nothing is claimed on its span.";
  if (derived?.role === "sample") return "Gain over temperature is the lot's mean; this device is one of the sample.";
  return "Gain over temperature is the lot's, proven on its sample.";
}

function pointsText(points: Derived["points"]): string {
  const purposes = [...new Set(points.map((point) => point.purpose))];
  return purposes
    .map((purpose) => {
      const own = points.filter((point) => point.purpose === purpose);
      const what = purpose === "zero" ? "zero" : purpose === "span" ? "span" : "loaded and unloaded";
      return `${what} at ${listed(own.map((point) => formatFigure(point.chamberC, { digits: 1 })))} °C`;
    })
    .join(", ");
}

function listed(words: readonly string[]): string {
  return words.length < 2 ? words.join("") : `${words.slice(0, -1).join(", ")} and ${words.at(-1)}`;
}
