/**
 * Loaded first in the web process. Next takes `Content-Length` off what a route answers, as a body may have been decoded on its
 * way; without it no client shows how far a download is. A route that knows the length for sure says it once more under a name
 * that passes, and here it gets its own again.
 */
import { ServerResponse } from "node:http";

const { setHeader } = ServerResponse.prototype;

ServerResponse.prototype.setHeader = function setHeaderOrLength(name, value) {
  const isLength = name.toLowerCase() === "x-body-length";
  return setHeader.call(this, isLength ? "content-length" : name, isLength ? String(value) : value);
};
