"use client";

import Link from "next/link";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Card } from "@/app/_components/card";
import { ImageDifference } from "@/app/_components/difference/image-difference";
import { dumpTypeOf } from "@/app/_components/dump-type";
import { FileDrop } from "@/app/_components/file-drop";
import { FormError } from "@/app/_components/form/form-error";
import { StateMark } from "@/app/_components/state/state-mark";
import type { FileComparison } from "@/schemas/api/compare";
import { DUMP_MAX_BYTES } from "@/schemas/api/devices";
import { changeWords } from "./change-words";

/** Takes a file and shows how it differs from the image. Nothing is stored. */
export function FileDifference({ packageId, serial }: { packageId: string; serial: string }) {
  const [found, setFound] = useState<FileComparison>();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const [busy, setBusy] = useState(false);
  const compare = async (file: File) => {
    setBusy(true);
    setProblem(null);
    setFound(undefined);
    try {
      const path = `/api/v1/compare/file?package=${packageId}&serial=${encodeURIComponent(serial)}`;
      const contentType = await dumpTypeOf(file);
      setFound(await callApi<FileComparison>(path, { method: "POST", body: file, contentType }));
    } catch (error) {
      setProblem(problemOf(error));
    }
    setBusy(false);
  };
  return (
    <>
      <Card title={`A file against the image of ${serial}`}>
        <FileDrop
          label={busy ? "Comparing" : "Choose a file"}
          accept=".hex,.ihex,.s19,.srec,.bin,.raw,.eep"
          help="Intel HEX, S-records, or the raw bytes of the whole memory from its base address. Nothing is stored."
          maxBytes={DUMP_MAX_BYTES}
          onFile={(file) => void compare(file)}
        />
        <div aria-live="polite" className="mt-3">
          <FormError problem={problem} />
        </div>
      </Card>
      {found ? <Found found={found} /> : null}
    </>
  );
}

function Found({ found }: { found: FileComparison }) {
  const { image, file, change, fields, bytes } = found;
  const broken = file.checksums.filter((sum) => !sum.ok).map((sum) => sum.name);
  return (
    <Card
      title={
        <>
          Image{" "}
          <Link href={`/packages/${image.package}/images/${encodeURIComponent(image.serial)}`} className="font-mono">
            {image.serial}
          </Link>{" "}
          → file
        </>
      }
      note={`package ${image.version} of ${image.lot}`}
      aside={<StateMark {...changeWords[change]} />}
    >
      {broken.length > 0 ? (
        <p className="mb-3 text-sm text-oxide">
          In the file {broken.join(", ")} {broken.length === 1 ? "does" : "do"} not fit the bytes covered: they were
          changed after the checksum was made, or read wrongly.
        </p>
      ) : null}
      <ImageDifference
        item={{ serial: image.serial, change: "values", fields, bytes }}
        hex={file.bytes}
        fields={image.fields}
        fill={image.fill}
        kept={image.kept}
      />
    </Card>
  );
}
