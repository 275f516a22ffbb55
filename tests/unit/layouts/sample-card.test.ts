import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { createElement } from "react";
import { renderToStaticMarkup } from "react-dom/server";
import { expect, it } from "vitest";
import { encodeSample } from "@/app/(site)/families/[family]/layouts/sample/encode-sample";
import { SampleCard } from "@/app/(site)/families/[family]/layouts/sample/sample-card";
import { inventedSample } from "@/app/(site)/families/[family]/layouts/sample/sample-choice";
import type { LayoutField } from "@/schemas/documents/layout";
import { smallLayout } from "../builders/layouts";

it("the sample's table shows every digit, true minus signs, capitals, and the nominal output as the family has it", () => {
  const more: LayoutField[] = [
    { name: "least", at: 42, type: "i64", value: { const: "-9223372036854775808" } },
    { name: "nominal", at: 50, type: "f32", unit: "mV/V", value: { from: "family.nominalOutput" } },
    { name: "mark", at: 54, type: "bytes", value: { const: "5aa5" } },
  ];
  const small = smallLayout();
  const layout = { ...small, fields: [...small.fields, ...more] };
  const sample = encodeSample(layout, { code: "LC-1", referenceC: 20, capacityKg: 20, nominalMvV: 2 });
  const noop = () => undefined;
  const props = { layout, sample, origin: inventedSample, lots: [], shown: undefined, onOrigin: noop, onPoint: noop };
  const card = createElement(SampleCard, props);
  const html = renderToStaticMarkup(createElement(QueryClientProvider, { client: new QueryClient() }, card));
  const cells = (name: string) => {
    const row = html.split("<tr").find((one) => one.includes(`>${name}</th>`)) ?? "";
    return [...row.matchAll(/<td[^>]*>([^<]*)<\/td>/g)].map((match) => match[1]);
  };
  expect(cells("least")).toEqual(["−9223372036854775808", "", "0000000000000080", "−9223372036854775808", "—"]);
  expect(cells("nominal")).toEqual(["2", "mV/V", "00000040", "2", "—"]);
  expect(cells("mark")).toEqual(["5AA5", "", "5AA5", "5AA5", "—"]);
  expect(html).not.toContain("truncate");
});
