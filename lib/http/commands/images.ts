import { READERS } from "@/lib/domain/roles";
import { getImageBytes, getImageHex, getImageView, listImages as list } from "@/lib/services/packages/read-images";
import { byId } from "@/schemas/api/common";
import { byImage, image, imagePage, imageQuery } from "@/schemas/api/images";
import { chooseMediaType } from "../accept";
import { bytesResponse } from "../bytes-response";
import { command } from "../command";

const readers = { who: "person", roles: READERS } as const;
const IMAGE_TYPES = ["application/json", "text/x-intel-hex", "application/octet-stream"] as const;

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
  summary: "One device's image: decoded, as Intel HEX or as raw bytes",
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
    const read = type === "text/x-intel-hex" ? getImageHex : getImageBytes;
    return bytesResponse(headers, await read(ctx, params.id, params.serial), { vary: "accept" });
  },
});

export const imageCommands = [listImages, getImage];
