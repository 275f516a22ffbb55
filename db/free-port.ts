/** Ports that nobody listens on. */
import { createServer } from "node:net";

/** The port if nobody listens on it; for 0, any free one. */
export function findFreePort(port: number, host = "127.0.0.1"): Promise<number | undefined> {
  return new Promise((resolve) => {
    const server = createServer();
    server.once("error", () => resolve(undefined));
    server.listen(port, host, () => {
      const address = server.address();
      server.close(() => resolve(typeof address === "object" && address !== null ? address.port : undefined));
    });
  });
}
