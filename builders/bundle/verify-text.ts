/** Files of a released bundle that `SHA256SUMS` does not list: they are held by the signature, or are this page itself. */
export const UNLISTED_FILES = ["SHA256SUMS", "VERIFY.txt", "release.json", "release.sig", "signing-key.pem"] as const;

/** Files of a preview that `SHA256SUMS` does not list. */
export const UNLISTED_PREVIEW_FILES = ["NOT-RELEASED.txt", "SHA256SUMS", "VERIFY.txt"] as const;

const SUMS_COMMAND = "sha256sum -c --strict SHA256SUMS";

/** Commands of `VERIFY.txt`, in their order; each ends with status 0 only where it holds. */
export const VERIFY_COMMANDS = {
  keyId: `grep -q "\\"keyId\\":\\"$(openssl pkey -pubin -in signing-key.pem -outform DER | sha256sum | cut -c1-16)\\"" release.json`,
  signature: "openssl pkeyutl -verify -pubin -inkey signing-key.pem -rawin -in release.json -sigfile release.sig",
  sums: `grep -q "\\"sums\\":\\"$(sha256sum SHA256SUMS | cut -d' ' -f1)\\"" release.json`,
  files: SUMS_COMMAND,
  unlisted: listCommand(UNLISTED_FILES),
} as const;

/** Compares the files that are there with those that are listed; prints and fails where they differ. */
function listCommand(unlisted: readonly string[]): string {
  const names = unlisted.join("|").replaceAll(".", "\\.");
  const there = `find . -type f | sed 's|^\\./||' | grep -vxE '${names}' | LC_ALL=C sort`;
  return `test "$(${there})" = "$(cut -c67- SHA256SUMS)"`;
}

/** `VERIFY.txt` of a released bundle: how to check it offline with tools that every Debian has. */
export function verifyText(): string {
  return `How to verify this bundle
=========================

Unpack it into an empty folder and run the commands below in that folder, in this
order. Each one has to end without an error (exit status 0). They need sha256sum,
openssl 3, grep, find and sed, and no network. If one fails, write no device from
this bundle and ask for it again.

1. The key. This prints the key id of the key that lies in the bundle:

     openssl pkey -pubin -in signing-key.pem -outform DER | sha256sum | cut -c1-16

   Compare it with the key ids that the installation lists under
   GET /api/v1/signing-keys, fetched by a way that you trust. The key in the bundle is
   there for convenience only: whoever could change the bundle could change it too.
   This compares it with the one that the release names:

     ${VERIFY_COMMANDS.keyId}

2. The signature. release.json was signed with that key:

     ${VERIFY_COMMANDS.signature}

3. The list. release.json is about this list of files:

     ${VERIFY_COMMANDS.sums}

4. The files. Every listed file is the one that was released:

     ${VERIFY_COMMANDS.files}

5. Nothing else. Apart from ${UNLISTED_FILES.slice(0, 3).join(", ")},
   ${UNLISTED_FILES[3]} and ${UNLISTED_FILES[4]}, a file that is not listed is not part of the bundle:

     ${VERIFY_COMMANDS.unlisted}

release.json names the lot, the version and the sequence. Sequences of a lot only rise:
do not write from a bundle with a lower one than you have seen.
`;
}

/** `VERIFY.txt` of a preview. */
export function previewVerifyText(): string {
  return `How to check this preview
=========================

This package is not released: nothing here is signed, and no device may be written
from it. In the folder that it was unpacked into, this tells only that no file was
damaged on the way:

     ${SUMS_COMMAND}
`;
}

/** `NOT-RELEASED.txt` of a preview; it names no state, so that a preview stays the same bytes from draft to approval. */
export function notReleasedText(facts: { lot: string; version: string }): string {
  return `Package ${facts.version} of lot ${facts.lot} is not released: this is a preview.
Do not write devices from this bundle.
`;
}
