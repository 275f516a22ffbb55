import type { Metadata } from "next";
import Link from "next/link";
import { Card } from "@/app/_components/card";
import { SignedOutFrame } from "@/app/_components/frame/signed-out-frame";
import { ForgotForm } from "./forgot-form";

export const metadata: Metadata = { title: "Password forgotten" };

export default function ForgotPage() {
  return (
    <SignedOutFrame>
      <Card>
        <h1 className="mb-1 text-lg">Password forgotten</h1>
        <ForgotForm />
        <p className="mt-4 text-sm text-ink-soft">
          With the one-time code lost as well, an admin sends you a link that takes it away.{" "}
          <Link href="/sign-in">Back to signing in</Link>
        </p>
      </Card>
    </SignedOutFrame>
  );
}
