"use client";

import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { callApi } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { DifferenceTable } from "@/app/_components/difference/difference-table";
import { ImageDifference } from "@/app/_components/difference/image-difference";
import { Notice } from "@/app/_components/notice";
import type { ComparedDevice } from "@/schemas/api/compare";
import type { ImageView } from "@/schemas/api/images";
import type { LayoutDocument } from "@/schemas/documents/layout";

export interface ComparisonViewProps {
  /** Ids of the older and the newer package. */
  from: string;
  to: string;
  /** Layout of the newer one. */
  layout: LayoutDocument;
  /** Serial whose bytes are shown first. */
  serial?: string;
}

/** The serials that differ between two packages, and the bytes of the one that is opened. */
export function ComparisonView({ from, to, layout, serial }: ComparisonViewProps) {
  const [opened, setOpened] = useState<ComparedDevice>();
  const open = (item: ComparedDevice) => {
    setOpened(item);
    const query = new URLSearchParams(window.location.search);
    query.set("serial", item.serial);
    window.history.replaceState(null, "", `${window.location.pathname}?${query}`);
  };
  return (
    <>
      <Card title="Serials" note="Old → new as decoded from the bytes; open one to see its bytes">
        <DifferenceTable
          from={from}
          to={to}
          layout={layout}
          opened={opened?.serial ?? serial}
          onOpen={(row) => open(row as unknown as ComparedDevice)}
        />
      </Card>
      {opened ? (
        <SerialDifference key={opened.serial} from={from} to={to} item={opened} />
      ) : serial ? (
        <LinkedSerial from={from} to={to} serial={serial} />
      ) : null}
    </>
  );
}

/** The serial that the address names: looked up by itself, as it may be far down the list. */
function LinkedSerial({ from, to, serial }: { from: string; to: string; serial: string }) {
  const { data, error, refetch } = useQuery({
    queryKey: ["compared", from, to, serial],
    queryFn: ({ signal }) =>
      callApi<{ items: ComparedDevice[] }>(
        `/api/v1/compare/serials?from=${from}&to=${to}&limit=100&search=${encodeURIComponent(serial)}`,
        { signal },
      ),
  });
  const found = data?.items.find((item) => item.serial === serial.toUpperCase());
  if (found) return <SerialDifference from={from} to={to} item={found} />;
  if (error) return <LoadFailed message={error.message} onRetry={() => void refetch()} />;
  if (!data) return <p className="text-sm text-ink-soft">Loading {serial}</p>;
  return (
    <Notice title={`${serial} does not differ`}>Both packages hold the same bytes for it, or neither holds it.</Notice>
  );
}

function SerialDifference({ from, to, item }: { from: string; to: string; item: ComparedDevice }) {
  const holder = item.change === "removed" ? from : to;
  const { data, error, refetch } = useQuery({
    queryKey: ["image", holder, item.serial],
    queryFn: ({ signal }) =>
      callApi<ImageView>(`/api/v1/packages/${holder}/images/${encodeURIComponent(item.serial)}`, { signal }),
  });
  return (
    <Card
      title={`Image of ${item.serial}`}
      aside={<a href={`/packages/${holder}/images/${encodeURIComponent(item.serial)}`}>Whole image</a>}
    >
      <div aria-live="polite">
        {data ? (
          <ImageDifference item={item} hex={data.bytes} fields={data.fields} fill={data.fill} kept={data.kept} />
        ) : error ? (
          <LoadFailed message={error.message} onRetry={() => void refetch()} />
        ) : (
          <p className="text-sm text-ink-soft">Loading its bytes</p>
        )}
      </div>
    </Card>
  );
}

function LoadFailed({ message, onRetry }: { message: string; onRetry: () => void }) {
  return (
    <Notice tone="bad" title="The bytes could not be loaded">
      {message} <Button onClick={onRetry}>Try again</Button>
    </Notice>
  );
}
