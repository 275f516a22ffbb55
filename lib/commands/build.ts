/** `npm run build`: builds the app if its sources changed. */
import { ensureBuild } from "@/lib/commands/build-app";

export default async function build(_args: string[], signal: AbortSignal): Promise<number> {
  const built = await ensureBuild({ signal, say: console.log });
  console.log(built ? "Built." : "The build is up to date.");
  return 0;
}
