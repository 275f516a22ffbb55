import { Card } from "@/app/_components/card";
import { CopyButton } from "@/app/_components/copy-button";
import { Digest } from "@/app/_components/digest";
import { TimeText } from "@/app/_components/time-text";
import { formatSize } from "@/lib/domain/format/size";
import type { PackageProvenance } from "@/lib/services/packages/get-provenance";

const kinds = { release: "Released", reinstatement: "Reinstated", withdrawal: "Withdrawn" } as const;

/** Every time the package went live or was withdrawn, with the lot's sequence. */
export function ReleasesCard({ releases }: Pick<PackageProvenance, "releases">) {
  return (
    <Card title="Releases" note="A station refuses a sequence lower than it has seen">
      {releases.length === 0 ? <p className="text-sm text-ink-soft">It has never been live.</p> : null}
      <ul className="flex flex-col text-sm">
        {releases.map((one) => (
          <li key={one.sequence} className="border-b border-rule/55 py-1.5 last:border-0">
            <span className="font-semibold">
              {kinds[one.kind]}, sequence <span className="font-mono">{one.sequence}</span>
            </span>{" "}
            by {one.by}, <TimeText at={one.at} />
            {one.reason ? <span className="block">“{one.reason}”</span> : null}
            {one.keyId ? (
              <span className="block text-xs text-ink-soft">
                signed with key <span className="font-mono">{one.keyId}</span>
              </span>
            ) : null}
          </li>
        ))}
      </ul>
    </Card>
  );
}

const steps = {
  keyId: "The key in the bundle is the one that the release names. Compare its id with the list of signing keys too.",
  signature: "The release was signed with it.",
  sums: "The release is about this list of files.",
  files: "Every listed file is the one that was released.",
  unlisted: "No file is there that is not listed.",
} as const;

/** How to check the bundle offline, with tools that every Debian has. */
export function VerifyCard({
  commands,
  keyId,
}: {
  commands: Record<keyof typeof steps, string>;
  keyId: string | null;
}) {
  return (
    <Card title="Check the bundle yourself" note="sha256sum and openssl do, without a network">
      <p className="text-sm">
        Unpack it into an empty folder and run these there, in this order; each has to end without an error.
        {keyId ? (
          <>
            {" "}
            The key's id is <span className="font-mono">{keyId}</span>; this installation lists its keys under{" "}
            <a href="/api/v1/signing-keys" className="font-mono">
              /api/v1/signing-keys
            </a>
            .
          </>
        ) : null}
      </p>
      <ol className="mt-2 flex flex-col gap-2.5 text-sm">
        {(Object.keys(steps) as (keyof typeof steps)[]).map((name, at) => (
          <li key={name} className="min-w-0">
            <p className="text-ink-soft">
              {at + 1}. {steps[name]}
            </p>
            <div className="mt-0.5 flex items-start gap-2 rounded bg-sunk px-2.5 py-1.5">
              <code className="min-w-0 flex-1 font-mono text-[13px] wrap-anywhere">{commands[name]}</code>
              <CopyButton text={commands[name]} name={`command of step ${at + 1}`} />
            </div>
          </li>
        ))}
      </ol>
    </Card>
  );
}

/** Files that stand beside the images, by digest. */
export function FilesCard({ files }: Pick<PackageProvenance, "files">) {
  if (files.length === 0) return null;
  return (
    <Card title="Files">
      <ul className="flex flex-col gap-2 text-sm">
        {files.map((file) => (
          <li key={file.name}>
            <span className="font-mono">{file.name}</span>{" "}
            <span className="text-ink-soft">{formatSize(file.bytes)}</span>
            <span className="block">
              <Digest value={file.sha256} name={`digest of ${file.name}`} />
            </span>
          </li>
        ))}
      </ul>
    </Card>
  );
}

/** What the ledger says about the package. */
export function EventsCard({ events }: Pick<PackageProvenance, "events">) {
  return (
    <Card title="In the ledger" note="Each event is chained to the one before by its hash">
      <ol className="flex flex-col text-sm">
        {events.map((event) => (
          <li
            key={event.seq}
            className="grid gap-x-4 border-b border-rule/55 py-1.5 last:border-0 sm:grid-cols-[4rem_1fr_auto]"
          >
            <span className="font-mono text-ink-soft">{event.seq}</span>
            <span className="min-w-0">
              {actionWords(event.action)}
              {event.actorName ? ` by ${event.actorName}` : ""}, <TimeText at={event.at} />
            </span>
            <Digest value={event.hash} short />
          </li>
        ))}
      </ol>
    </Card>
  );
}

/** `package.taken-back` as "Package taken back". */
function actionWords(action: string): string {
  const text = action.replaceAll(/[.-]/g, " ");
  return text.charAt(0).toUpperCase() + text.slice(1);
}
