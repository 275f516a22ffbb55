"use client";

import ErrorPage from "@/app/error";
import { fontVariables } from "@/app/fonts";
import "@/app/globals.css";

/** Stands in for the root layout when that fails itself. */
export default function GlobalError(props: { error: Error & { digest?: string }; reset: () => void }) {
  return (
    <html lang="en" className={fontVariables}>
      <body>
        <ErrorPage {...props} />
      </body>
    </html>
  );
}
