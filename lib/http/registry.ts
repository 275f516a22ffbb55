import type { AnyCommand } from "./command";

/** Every command of the API, for the OpenAPI document and the tests. A route file without its command here fails a test. */
export const commands: readonly AnyCommand[] = [];
