import pino from "pino";
import { env } from "./env";

/** The application's log: JSON lines on standard error, never on the client's side. */
export const log = pino({ level: env().logLevel }, pino.destination(2));
