/**
 * First step of every command, for a bare Node without packages: checks Node, installs the lock file's packages when they
 * are missing or differ, then hands over to the command's TypeScript file in this same process, so that signals need no
 * forwarding. Plain old syntax and built-in modules only: an old Node must get as far as the message that it is old.
 */
import { spawnSync } from "node:child_process";
import { existsSync, mkdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";

const NODE_NEEDED = [20, 9];
/** Commands by name, each in the file of its name beside this one: `export default async function (args, signal)`. */
const COMMANDS = [
  "start",
  "test",
  "check",
  "migrate",
  "worker",
  "codegen",
  "build",
  "verify",
  "rebuild",
  "station",
  "bench",
  "demo",
];

const checkout = join(dirname(fileURLToPath(import.meta.url)), "../..");

function refuse(line) {
  process.stderr.write(`trimwright: ${line}\n`);
  process.exit(1);
}

function assertNodeIsRecent() {
  const parts = process.version.slice(1).split(".").map(Number);
  const recent = parts[0] > NODE_NEEDED[0] || (parts[0] === NODE_NEEDED[0] && parts[1] >= NODE_NEEDED[1]);
  if (!recent) refuse(`Node ${NODE_NEEDED.join(".")} or newer is needed, this is ${process.version.slice(1)}`);
}

function readPackages(file) {
  return existsSync(file) ? JSON.parse(readFileSync(file, "utf8")).packages : {};
}

/** npm notes what it installed; every package of the lock file must be there as locked, save those for other systems. */
function isInstalled() {
  const locked = readPackages(join(checkout, "package-lock.json"));
  const installed = readPackages(join(checkout, "node_modules/.package-lock.json"));
  return Object.keys(locked).every((path) => {
    if (path === "" || (locked[path].optional && !installed[path])) return true;
    return Boolean(installed[path]) && installed[path].integrity === locked[path].integrity;
  });
}

function isAlive(pid) {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return error.code === "EPERM";
  }
}

function installPackages() {
  const lock = join(checkout, ".local/install.lock");
  mkdirSync(dirname(lock), { recursive: true });
  const holder = existsSync(lock) ? Number(readFileSync(lock, "utf8")) : 0;
  if (holder > 0 && isAlive(holder)) refuse(`packages are being installed here already (process ${holder})`);
  writeFileSync(lock, String(process.pid));
  process.stdout.write("Installing npm packages from the lock file …\n");
  const npm = process.env.npm_execpath ? [process.execPath, [process.env.npm_execpath]] : ["npm", []];
  // The build needs the development packages too, whatever NODE_ENV says.
  const result = spawnSync(
    npm[0],
    npm[1].concat(["ci", "--include=dev", "--no-fund", "--no-audit", "--loglevel=error"]),
    {
      cwd: checkout,
      encoding: "utf8",
      stdio: ["ignore", "ignore", "pipe"],
    },
  );
  rmSync(lock, { force: true });
  if (result.status === 0) return;
  const output = String(result.stderr || result.error?.message || "");
  const lines = output
    .split("\n")
    .filter((line) => line.trim() !== "" && !/complete log of this run|debug-0\.log/.test(line));
  if (/ENOSPC|no space left/i.test(output)) refuse("disk full while installing npm packages");
  const telling = lines.filter((line) => !/npm (error|ERR!) (code|errno|syscall)\b/.test(line));
  refuse(`npm packages could not be installed: ${telling[0] || lines[0] || `npm ci ended with code ${result.status}`}`);
}

function main() {
  assertNodeIsRecent();
  const name = process.argv[2];
  if (COMMANDS.indexOf(name) < 0) refuse(`unknown command; known are ${COMMANDS.join(", ")}`);
  process.chdir(checkout);
  if (!isInstalled()) installPackages();
  return import("tsx/esm/api")
    .then((tsx) => {
      tsx.register();
      return import("./command-line.ts");
    })
    .then((commandLine) => commandLine.runCommand(name, process.argv.slice(3)));
}

main();
