import type { Metadata } from "next";
import { redirect } from "next/navigation";
import { SignedOutFrame } from "@/app/_components/frame/signed-out-frame";
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
    <SignedOutFrame wide={accounts.length > 0}>
      <p className="-mt-4 max-w-[60ch] text-ink-soft">
        Coefficients, parameter images and releases of digital load cells, traced for every serial.
      </p>
      {out ? (
        <Notice tone="good" title="Signed out">
          <p>This browser's session has ended.</p>
        </Notice>
      ) : null}
      <SignInForm goTo={goTo} refused={refusalOf(first(error))} accounts={accounts} />
    </SignedOutFrame>
  );
}
