import type { ReactNode } from "react";
import { Frame } from "@/app/_components/frame/frame";
import { requirePerson } from "@/lib/auth/current-person";

/** Every page of a signed-in person; who is signed out goes to the sign-in page. */
export default async function SiteLayout({ children }: { children: ReactNode }) {
  const { name, roles } = await requirePerson();
  return <Frame person={{ name, roles }}>{children}</Frame>;
}
