import pino from "pino";

/** The application's log: JSON lines on standard error, never on the client's side. */
export const log = pino({ level: process.env.LOG_LEVEL ?? "info" }, pino.destination(2));
