import { ApiError, callApi } from "@/app/_components/api-client";

/**
 * Posts one of next-auth's forms with the token that belongs to it.
 * @throws ApiError with the refusal; code `auth.no_cookies` where the browser keeps none, so that the token is never the right one
 */
async function postForm(path: string, fields: Record<string, string>): Promise<void> {
  const { csrfToken } = await callApi<{ csrfToken: string }>("/api/auth/csrf");
  const { url } = await callApi<{ url: string }>(path, {
    method: "POST",
    json: { ...fields, csrfToken, json: "true" },
  });
  if (!new URL(url, window.location.origin).searchParams.has("csrf")) return;
  throw new ApiError({
    code: "auth.no_cookies",
    status: 400,
    title: "The browser keeps no cookies",
    detail: "Signing in needs a cookie of this site. Allow it in the browser's settings and try again.",
  });
}

export function signIn(fields: { email: string; password: string; oneTimeCode: string }): Promise<void> {
  return postForm("/api/auth/callback/credentials", fields);
}

export function signOut(): Promise<void> {
  return postForm("/api/auth/signout", {});
}
