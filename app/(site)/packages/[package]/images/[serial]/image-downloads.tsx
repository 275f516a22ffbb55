"use client";

import { useState } from "react";
import { ApiError, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { useToast } from "@/app/_components/toast";

const kinds = {
  hex: { accept: "text/x-intel-hex", name: "HEX", label: "Download HEX", hint: "Intel HEX, as in the bundle" },
  srec: {
    accept: "text/x-motorola-srecord",
    name: "S-records",
    label: "S-records",
    hint: "The same bytes at the same addresses",
  },
  bin: {
    accept: "application/octet-stream",
    name: "raw bytes",
    label: "Raw bytes",
    hint: "The image without addresses; what the device keeps is fill",
  },
} as const;

/** The image as files: the API tells them apart by what is asked for, so a plain link would not do. */
export function ImageDownloads({ endpoint, fileName }: { endpoint: string; fileName: string }) {
  const tell = useToast();
  const [pending, setPending] = useState<keyof typeof kinds>();

  const save = async (kind: keyof typeof kinds) => {
    setPending(kind);
    try {
      saveBlob(await fetchAs(endpoint, kinds[kind].accept), `${fileName}.${kind}`);
    } catch (error) {
      const { title, detail } = problemOf(error);
      tell({ tone: "bad", title: `The ${kinds[kind].name} could not be fetched`, text: detail ?? title });
    }
    setPending(undefined);
  };

  return (Object.keys(kinds) as (keyof typeof kinds)[]).map((kind) => (
    <Button key={kind} title={kinds[kind].hint} pending={pending === kind} onClick={() => void save(kind)}>
      {kinds[kind].label}
    </Button>
  ));
}

async function fetchAs(endpoint: string, accept: string): Promise<Blob> {
  const response = await fetch(endpoint, { headers: { accept } });
  if (response.ok) return response.blob();
  throw new ApiError({ ...(await response.json()), status: response.status });
}

function saveBlob(blob: Blob, name: string): void {
  const url = URL.createObjectURL(blob);
  const link = document.createElement("a");
  link.href = url;
  link.download = name;
  link.click();
  setTimeout(() => URL.revokeObjectURL(url), 10_000);
}
