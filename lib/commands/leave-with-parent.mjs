/** Loaded first in a served child process: when the supervisor is gone, however it ended, the child goes too. */
if (process.channel) {
  process.on("disconnect", () => process.kill(process.pid, "SIGTERM"));
  process.channel.unref();
}
