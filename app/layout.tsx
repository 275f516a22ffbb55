import type { Metadata, Viewport } from "next";
import { cookies } from "next/headers";
import { connection } from "next/server";
import type { ReactNode } from "react";
import { Providers } from "@/app/_components/providers";
import { readTheme, themeCookie } from "@/app/_components/theme";
import { fontVariables } from "@/app/fonts";
import "@/app/globals.css";

export const metadata: Metadata = {
  title: { default: "Trimwright", template: "%s · Trimwright" },
  description: "Coefficients, parameter images and releases of digital load cells, traced for every serial.",
};

export const viewport: Viewport = { width: "device-width", initialScale: 1 };

/** Waits for the connection so that every page is rendered per request and carries its own script nonce. */
export default async function RootLayout({ children }: { children: ReactNode }) {
  await connection();
  const theme = readTheme((await cookies()).get(themeCookie)?.value);
  return (
    <html lang="en" data-theme={theme} className={fontVariables}>
      <body>
        <Providers>{children}</Providers>
      </body>
    </html>
  );
}
