/** Global set-up of the projects that serve the built app: builds it once, unless it is built from these sources. */
import { ensureBuild } from "@/lib/commands/build-app";

export default async function setUp(): Promise<void> {
  await ensureBuild({ say: console.log });
}
