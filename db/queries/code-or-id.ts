const UUID = /^[0-9a-f]{8}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{12}$/i;

/** Whether a path's part is a UUID. Codes have at most 32 characters, so that none is taken for one. */
export function isUuid(codeOrId: string): boolean {
  return UUID.test(codeOrId);
}
