/** Programs of Debian that the tests compare with or drive: found by running them, installed only when missing. */
import { existsSync } from "node:fs";
import { delimiter, join } from "node:path";
import { type InstallOptions, installPackages, mayInstall } from "@/lib/commands/debian";
import { runToEnd } from "@/lib/commands/run-tool";
import { searchPath } from "@/lib/env";
import { AppError } from "@/lib/errors";

interface Tool {
  package: string;
  /** Whether the machine has it. */
  isThere: () => boolean | Promise<boolean>;
}

const TOOLS: readonly Tool[] = [
  { package: "chromium", isThere: () => isProgramThere("chromium") },
  { package: "srecord", isThere: () => isProgramThere("srec_cat") },
  { package: "rhash", isThere: () => isProgramThere("rhash") },
  { package: "unzip", isThere: () => isProgramThere("unzip") },
  { package: "binutils", isThere: () => isProgramThere("objcopy") },
  { package: "openssl", isThere: () => isProgramThere("openssl") },
  { package: "python3-intelhex", isThere: () => isPythonModuleThere("intelhex") },
  { package: "python3-crccheck", isThere: () => isPythonModuleThere("crccheck") },
];

/**
 * Installs the packages whose programs are missing.
 * @throws AppError `packages.not_installed` when something is missing and this process may not install.
 */
export async function ensureTestTools(options: InstallOptions & { say: (line: string) => void }): Promise<void> {
  const found = await Promise.all(TOOLS.map((tool) => tool.isThere()));
  const missing = TOOLS.filter((_tool, index) => !found[index]).map((tool) => tool.package);
  if (missing.length === 0) return;
  if (!mayInstall()) {
    throw new AppError("packages.not_installed", {
      packages: missing,
      message: `The tests need ${missing.join(", ")}; as root: apt-get install ${missing.join(" ")}`,
    });
  }
  options.say(`Installing ${missing.join(", ")} from Debian …`);
  await installPackages(missing, options);
}

function isProgramThere(name: string): boolean {
  return searchPath()
    .split(delimiter)
    .some((folder) => existsSync(join(folder, name)));
}

/** Asked of Debian's own Python: another one in the path has other modules. */
async function isPythonModuleThere(name: string): Promise<boolean> {
  if (!existsSync("/usr/bin/python3")) return false;
  const result = await runToEnd("/usr/bin/python3", ["-c", `import ${name}`]);
  return result.code === 0;
}
