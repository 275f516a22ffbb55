import { type NextRequest, NextResponse } from "next/server";

/**
 * Content security policy of every page, with a script nonce made anew for each request: Next puts it on its own
 * scripts when it finds it in the request's headers. Pages also learn their own path, to come back to after sign-in;
 * one that a client sent along is overwritten.
 */
export function proxy(request: NextRequest): NextResponse {
  const nonce = btoa(crypto.randomUUID());
  const policy = contentSecurityPolicy(nonce);
  const headers = new Headers(request.headers);
  headers.set("x-nonce", nonce);
  headers.set("content-security-policy", policy);
  headers.set("x-path", pathOf(request));
  const response = NextResponse.next({ request: { headers } });
  response.headers.set("content-security-policy", policy);
  response.headers.set("referrer-policy", "same-origin");
  response.headers.set("x-content-type-options", "nosniff");
  return response;
}

/** Path and query as a person would see them: the router's own parameter for page data is left out. */
function pathOf({ nextUrl }: NextRequest): string {
  const query = new URLSearchParams(nextUrl.search);
  query.delete("_rsc");
  const search = query.toString();
  return search === "" ? nextUrl.pathname : `${nextUrl.pathname}?${search}`;
}

function contentSecurityPolicy(nonce: string): string {
  // React's development build rebuilds server stacks with eval; the production build never needs it.
  const development = process.env.NODE_ENV === "development" ? " 'unsafe-eval'" : "";
  return [
    "default-src 'self'",
    `script-src 'self' 'nonce-${nonce}' 'strict-dynamic'${development}`,
    "style-src 'self' 'unsafe-inline'",
    "img-src 'self' data: blob:",
    "font-src 'self' data:",
    "connect-src 'self'",
    "worker-src 'self' blob:",
    "object-src 'none'",
    "base-uri 'self'",
    "form-action 'self'",
    "frame-ancestors 'none'",
  ].join("; ");
}

/** `/api/` is left out: a proxy in front of it would cut long uploads silently. Static files need no policy. */
export const config = {
  matcher: ["/((?!api/|_next/static/|_next/image|icon.svg|favicon.ico).*)"],
};
