/** Where a person goes who came from nowhere. */
export const HOME_PATH = "/today";

const ANYWHERE = "http://local.invalid";

/**
 * A path of this site to send a browser to, from an address that came with a request; {@link HOME_PATH} for anything that could
 * lead away (`//host`, `/\host`, another scheme), to the API, or back to the sign-in page.
 */
export function localPath(given: string | null | undefined): string {
  if (!given?.startsWith("/")) return HOME_PATH;
  if (!URL.canParse(given, ANYWHERE)) return HOME_PATH;
  const url = new URL(given, ANYWHERE);
  // What a browser reads is what counts: it drops tabs and line ends and takes backslashes for slashes, as the parser just did.
  if (url.origin !== ANYWHERE || url.pathname.startsWith("//") || url.pathname.includes("\\")) return HOME_PATH;
  if (/^\/(api|sign-in)(\/|$)/.test(url.pathname)) return HOME_PATH;
  return `${url.pathname}${url.search}${url.hash}`;
}
