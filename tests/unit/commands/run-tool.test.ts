import { describe, expect, it } from "vitest";
import { runToEnd, runTool, tellingLine } from "@/lib/commands/run-tool";

const shell = (script: string) => ["-c", script];

describe("a program that is run to its end", () => {
  it("gives what it wrote and its code", async () => {
    await expect(runToEnd("/bin/sh", shell("echo out; echo err >&2; exit 3"))).resolves.toEqual({
      code: 3,
      stdout: "out\n",
      stderr: "err\n",
    });
  });

  it("is named when it is not there", async () => {
    await expect(runToEnd("/nowhere/apt-get", [])).rejects.toMatchObject({
      code: "command.not_found",
      message: "/nowhere/apt-get is not there",
    });
  });

  it("is ended by the signal, and says so", async () => {
    const stop = new AbortController();
    const running = runToEnd("/bin/sleep", ["60"], { signal: stop.signal });
    stop.abort();
    await expect(running).rejects.toMatchObject({ code: "command.stopped" });
  });

  it("is not begun once the signal came", async () => {
    await expect(runToEnd("/nowhere/program", [], { signal: AbortSignal.abort() })).rejects.toMatchObject({
      code: "command.stopped",
    });
  });

  it("keeps letters whole that come in pieces", async () => {
    const halves = "printf '\\342'; sleep 0.2; printf '\\202\\254'";
    await expect(runToEnd("/bin/sh", shell(halves))).resolves.toMatchObject({ stdout: "€" });
  });
});

describe("a program that has to succeed", () => {
  it("gives its output", async () => {
    await expect(runTool("/bin/sh", shell("echo done"))).resolves.toBe("done\n");
  });

  it("fails with the line that tells most", async () => {
    const script = "echo Reading lists; echo 'E: Unable to locate package postgresql' >&2; echo bye; exit 100";
    await expect(runTool("/bin/sh", shell(script))).rejects.toMatchObject({
      code: "command.failed",
      message: "/bin/sh failed: E: Unable to locate package postgresql",
      details: { program: "/bin/sh", code: 100 },
    });
  });

  it("fails with its code when it said nothing", async () => {
    await expect(runTool("/bin/sh", shell("exit 7"))).rejects.toMatchObject({ message: "/bin/sh failed with code 7" });
  });
});

describe("the telling line", () => {
  it.each([
    ["a\nE: one\nE: two\n", "E: one"],
    ["E: dpkg failed\nwrite: No space left on device", "write: No space left on device"],
    ["warming up\n  fatal: no such thing  \nend", "fatal: no such thing"],
    ["first\nlast\n\n", "last"],
    ["", ""],
  ])("of %j is %j", (output, line) => {
    expect(tellingLine(output)).toBe(line);
  });
});
