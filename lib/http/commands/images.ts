import { READERS } from "@/lib/domain/roles";
import {
  getImageBytes,
  getImageHex,
  getImageSRecords,
  getImageView,
  listImages as list,
} from "@/lib/services/packages/read-images";
import { byId } from "@/schemas/api/common";
import { byImage, image, imagePage, imageQuery } from "@/schemas/api/images";
import { chooseMediaType } from "../accept";
import { bytesResponse } from "../bytes-response";
import { command } from "../command";

const readers = { who: "person", roles: READERS } as const;
/** No type is registered for S-records; theirs is made as that of Intel HEX is. */
const IMAGE_TYPES = [
  "application/json",
  "text/x-intel-hex",
  "text/x-motorola-srecord",
  "application/octet-stream",
] as const;

/** How an image is read as a file of each type. */
const READERS_OF_TYPE = {
  "text/x-intel-hex": getImageHex,
  "text/x-motorola-srecord": getImageSRecords,
  "application/octet-stream": getImageBytes,
} as const;

export const listImages = command({
  id: "images.list",
  method: "GET",
  path: "/packages/{id}/images",
  summary: "Images of a package by serial, with their decoded fields where asked for",
  access: readers,
  params: byId,
  query: imageQuery,
  reply: { status: 200, schema: imagePage },
  errors: ["package.not_found", "package.not_built"],
  handle: (ctx, { params, query }) => list(ctx, { ...query, package: params.id }),
});

export const getImage = command({
  id: "images.get",
  method: "GET",
  path: "/packages/{id}/images/{serial}",
  summary: "One device's image: decoded, as Intel HEX, as S-records or as raw bytes in which kept ranges are fill",
  access: readers,
  params: byImage,
  reply: { status: 200, schema: image, mediaTypes: IMAGE_TYPES },
  errors: [
    "package.not_found",
    "package.not_built",
    "image.not_found",
    "request.not_acceptable",
    "request.range_invalid",
  ],
  handle: async (ctx, { params, headers }) => {
    const type = chooseMediaType(headers, IMAGE_TYPES);
    if (type === "application/json") return getImageView(ctx, params.id, params.serial);
    return bytesResponse(headers, await READERS_OF_TYPE[type](ctx, params.id, params.serial), { vary: "accept" });
  },
});

export const imageCommands = [listImages, getImage];
