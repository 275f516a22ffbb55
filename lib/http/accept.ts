import { AppError } from "@/lib/errors";

/**
 * Which of the offered media types a caller wants: the one with the highest weight in `Accept`, the first offered where all
 * are equal or nothing is asked for (RFC 9110, 12.5.1).
 * @throws AppError `request.not_acceptable` {offers}
 */
export function chooseMediaType<T extends string>(headers: Headers, offers: readonly [T, ...T[]]): T {
  const accept = headers.get("accept");
  if (accept === null || accept.trim() === "") return offers[0];
  const ranges = accept.split(",").map((part) => {
    const [range = "", ...parameters] = part.split(";").map((text) => text.trim().toLowerCase());
    const weight = parameters.find((parameter) => parameter.startsWith("q="));
    return { range, weight: weight === undefined ? 1 : Number(weight.slice(2)) || 0 };
  });
  const weigh = (offer: string): number => {
    const [type = ""] = offer.split("/");
    for (const range of [offer, `${type}/*`, "*/*"]) {
      const found = ranges.find((one) => one.range === range);
      if (found) return found.weight;
    }
    return 0;
  };
  let best: T | undefined;
  for (const offer of offers) if (weigh(offer) > (best === undefined ? 0 : weigh(best))) best = offer;
  if (best !== undefined) return best;
  throw new AppError("request.not_acceptable", { offers, message: `Offered are ${offers.join(", ")}.` });
}
