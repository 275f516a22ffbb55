import { READERS } from "@/lib/domain/roles";
import { compareDeviceImages } from "@/lib/services/compare/compare-device-images";
import { compareFile } from "@/lib/services/compare/compare-file";
import { comparePackages, getComparisonOverview } from "@/lib/services/compare/compare-packages";
import { exportComparison } from "@/lib/services/compare/export-comparison";
import { listChangedSerials } from "@/lib/services/compare/list-changed-serials";
import { compareLayouts } from "@/lib/services/layouts/compare-layouts";
import {
  changedSerials,
  changedSerialsQuery,
  compareFileQuery,
  compareImagesQuery,
  compareLayoutsQuery,
  compareQuery,
  comparison,
  comparisonExportQuery,
  comparisonOverview,
  fileComparison,
  imageComparison,
  layoutComparison,
  overviewQuery,
} from "@/schemas/api/compare";
import { DUMP_MAX_BYTES, HEX_TYPES, RAW_TYPE } from "@/schemas/api/devices";
import { command } from "../command";
import { textStreamOf } from "../stream";

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

export const compareOverview = command({
  id: "compare.overview",
  method: "GET",
  path: "/compare/overview",
  summary: "What differs between two packages in figures: counts, and how each field's difference is distributed",
  access: readers,
  query: overviewQuery,
  reply: { status: 200, schema: comparisonOverview },
  errors: ["package.not_found", "package.not_built"],
  handle: (ctx, { query }) => getComparisonOverview(ctx, query),
});

export const compareSerials = command({
  id: "compare.serials",
  method: "GET",
  path: "/compare/serials",
  summary: "Serials that differ between two packages: any part of them, filtered and in any order",
  access: readers,
  query: changedSerialsQuery,
  reply: { status: 200, schema: changedSerials },
  errors: ["package.not_found", "package.not_built"],
  handle: (ctx, { query }) => listChangedSerials(ctx, query),
});

export const compareExport = command({
  id: "compare.export",
  method: "GET",
  path: "/compare/export",
  summary: "The serials that a selection of a comparison holds, as one file",
  access: readers,
  query: comparisonExportQuery,
  reply: {
    status: 200,
    mediaTypes: ["text/csv", "application/json"],
    description: "CSV: a line for each field that differs; JSON: the overview, then the serials as items",
  },
  errors: ["package.not_found", "package.not_built"],
  handle: async (ctx, { query }) => {
    const { fileName, pieces } = await exportComparison(ctx, query);
    return new Response(textStreamOf(pieces), {
      headers: {
        "content-type": query.format === "csv" ? "text/csv; charset=utf-8; header=present" : "application/json",
        "content-disposition": `attachment; filename="${fileName}"`,
        "cache-control": "private, no-store",
        "x-content-type-options": "nosniff",
      },
    });
  },
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

export const compareWithFile = command({
  id: "compare.file",
  method: "POST",
  path: "/compare/file",
  summary: "A file against one image of a package, read by the image's layout; nothing is stored",
  access: { who: "person", roles: ["engineer", "reviewer", "service"], reads: true },
  query: compareFileQuery,
  body: { upload: { contentTypes: [...HEX_TYPES, RAW_TYPE], maxBytes: DUMP_MAX_BYTES } },
  reply: { status: 200, schema: fileComparison },
  errors: [
    "package.not_found",
    "package.not_built",
    "image.not_found",
    "dump.empty",
    "dump.wrong_length",
    "dump.incomplete",
    "hex.bad_checksum",
    "hex.overlap",
  ],
  handle: (ctx, { query, body: { bytes, contentType } }) =>
    compareFile(ctx, { ...query, bytes, format: contentType === RAW_TYPE ? "raw" : "hex" }),
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

export const compareCommands = [
  compare,
  compareOverview,
  compareSerials,
  compareExport,
  compareImages,
  compareWithFile,
  compareTwoLayouts,
];
