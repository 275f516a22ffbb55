/** A process that tries a lock when told to, says how it went and keeps it until its input ends. Argument: the file. */
import { once } from "node:events";
import { tryLock } from "@/lib/commands/process-lock";

process.send?.("ready");
await once(process, "message");
const lock = tryLock(process.argv[2] ?? "");
process.send?.("release" in lock ? "taken" : "held");
await once(process, "disconnect");
