import type { Metadata } from "next";
import { redirect } from "next/navigation";
import { MakerMark } from "@/app/_components/frame/maker-mark";
import { Notice } from "@/app/_components/notice";
import { findCurrentPerson } from "@/lib/auth/current-person";
import { localPath } from "@/lib/domain/local-path";
import { newContext } from "@/lib/http/route";
import { listDemoAccounts } from "@/lib/services/account/list-demo-accounts";
import { refusalOf } from "./refusal";
import { SignInForm } from "./sign-in-form";

export const metadata: Metadata = { title: "Sign in" };

type Search = { back?: string | string[]; error?: string | string[]; out?: string | string[] };

const first = (value: string | string[] | undefined) => (Array.isArray(value) ? value[0] : value);

/** Where everybody begins. Who is signed in already goes straight on. */
export default async function SignInPage({ searchParams }: { searchParams: Promise<Search> }) {
  const { back, error, out } = await searchParams;
  const goTo = localPath(first(back));
  if (await findCurrentPerson()) redirect(goTo);
  const accounts = await listDemoAccounts(newContext({ kind: "public" }));
  return (
    <main className="mx-auto flex max-w-[880px] flex-col gap-6 px-4 py-8 md:py-16">
      <div>
        <p className="flex items-center gap-2.5 text-lg font-bold tracking-[0.01em]">
          <MakerMark size={30} />
          Trimwright
        </p>
        <p className="mt-1.5 max-w-[60ch] text-ink-soft">
          Coefficients, parameter images and releases of digital load cells, traced for every serial.
        </p>
      </div>
      {out ? (
        <Notice tone="good" title="Signed out">
          <p>This browser's session has ended.</p>
        </Notice>
      ) : null}
      <SignInForm goTo={goTo} refused={refusalOf(first(error))} accounts={accounts} />
    </main>
  );
}
