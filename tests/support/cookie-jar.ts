/** A browser as far as sign-in goes: keeps cookies, fetches the form's token, signs in and out through the real routes. */
import { env } from "@/lib/env";
import type { Method, Reply, TestApi } from "./api";

export interface Browser {
  /** The cookies kept now, by name. */
  cookies: Map<string, string>;
  /** Every Set-Cookie header received, the newest last. */
  received: string[];
  call(method: Method, path: string, options?: { body?: unknown; headers?: Record<string, string> }): Promise<Reply>;
  csrfToken(): Promise<string>;
  signIn(fields: { email: string; password: string; oneTimeCode?: string }): Promise<Reply>;
  signOut(): Promise<Reply>;
}

const SIGN_IN = "/api/auth/callback/credentials";

export function openBrowser(api: TestApi, headers: Record<string, string> = {}): Browser {
  const browser: Browser = {
    cookies: new Map(),
    received: [],
    async call(method, path, options = {}) {
      const cookie = [...browser.cookies].map(([name, value]) => `${name}=${value}`).join("; ");
      const origin: Record<string, string> = method === "GET" ? {} : { origin: env().origin };
      const reply = await api.call(method, path, {
        ...options,
        headers: { ...headers, ...origin, cookie, ...options.headers },
      });
      keep(browser, reply.headers.getSetCookie());
      return reply;
    },
    csrfToken: async () => (await browser.call("GET", "/api/auth/csrf")).body.csrfToken,
    signIn: async (fields) =>
      browser.call("POST", SIGN_IN, { body: { ...fields, csrfToken: await browser.csrfToken(), json: "true" } }),
    signOut: async () =>
      browser.call("POST", "/api/auth/signout", { body: { csrfToken: await browser.csrfToken(), json: "true" } }),
  };
  return browser;
}

function keep(browser: Browser, lines: string[]): void {
  for (const line of lines) {
    browser.received.push(line);
    const [pair = "", ...attributes] = line.split(";").map((part) => part.trim());
    const name = pair.slice(0, pair.indexOf("="));
    const value = pair.slice(pair.indexOf("=") + 1);
    if (value === "" || attributes.some((one) => /^max-age=0$/i.test(one))) browser.cookies.delete(name);
    else browser.cookies.set(name, value);
  }
}
