import { READERS } from "@/lib/domain/roles";
import { compareLayouts } from "@/lib/services/layouts/compare-layouts";
import { compareDeviceImages } from "@/lib/services/packages/compare-device-images";
import { comparePackages } from "@/lib/services/packages/compare-packages";
import {
  compareImagesQuery,
  compareLayoutsQuery,
  compareQuery,
  comparison,
  imageComparison,
  layoutComparison,
} from "@/schemas/api/compare";
import { command } from "../command";

const readers = { who: "person", roles: READERS } as const;

export const compare = command({
  id: "compare.packages",
  method: "GET",
  path: "/compare",
  summary: "What differs between two packages: serials that differ, page by page, and counts over all",
  access: readers,
  query: compareQuery,
  reply: { status: 200, schema: comparison },
  errors: ["package.not_found", "package.not_built"],
  handle: (ctx, { query }) => comparePackages(ctx, query),
});

export const compareImages = command({
  id: "compare.images",
  method: "GET",
  path: "/compare/images",
  summary: "Two images side by side and what differs between them, field by field and byte by byte",
  access: readers,
  query: compareImagesQuery,
  reply: { status: 200, schema: imageComparison },
  errors: ["package.not_found", "package.not_built", "image.not_found"],
  handle: (ctx, { query }) => compareDeviceImages(ctx, query),
});

export const compareTwoLayouts = command({
  id: "compare.layouts",
  method: "GET",
  path: "/compare/layouts",
  summary: "What differs between two layouts of a family and the version step that it asks for",
  access: readers,
  query: compareLayoutsQuery,
  reply: { status: 200, schema: layoutComparison },
  errors: ["family.not_found", "layout.not_found"],
  handle: (ctx, { query }) => compareLayouts(ctx, query),
});

export const compareCommands = [compare, compareImages, compareTwoLayouts];
