/** Content type of a dump by its beginning: HEX starts with a colon, S-records with an S and a digit; else raw memory. */
export async function dumpTypeOf(file: Blob): Promise<string> {
  const start = new TextDecoder("latin1").decode(await file.slice(0, 2).arrayBuffer());
  return start.startsWith(":") || /^S[0-9]$/i.test(start) ? "text/plain" : "application/octet-stream";
}
