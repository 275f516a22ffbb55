"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { ConfirmDialog } from "@/app/_components/confirm-dialog";
import { DataTable } from "@/app/_components/table/data-table";
import { useToast } from "@/app/_components/toast";
import type { AccessKeyView } from "@/schemas/api/account";
import { revokeKeyAction } from "./actions";
import { MakeKey } from "./make-key";

export interface KeysCardProps {
  keys: readonly AccessKeyView[];
  /** RFC 3339. */
  now: string;
  oneTimeCode: boolean;
}

function stateOf(key: AccessKeyView, now: string): "working" | "expired" | "revoked" {
  if (key.revokedAt !== null) return "revoked";
  return key.expiresAt <= now ? "expired" : "working";
}

/** Keys for programs that act in one's name: reading, and engineer's work where one is an engineer. */
export function KeysCard({ keys, now, oneTimeCode }: KeysCardProps) {
  const [revoking, setRevoking] = useState<AccessKeyView>();
  const rows = keys.map((key) => ({ ...key, state: stateOf(key, now) }));
  return (
    <Card
      title="Access keys"
      note="for programs: reading, and an engineer's work; never decisions"
      aside={<MakeKey oneTimeCode={oneTimeCode} />}
    >
      <DataTable
        name="keys"
        urlName="keys"
        rows={rows}
        rowKey="id"
        columns={[
          { key: "name", header: "Key" },
          { key: "prefix", header: "Begins with", format: { as: "code" } },
          { key: "state", header: "State", format: { as: "state", kind: "access-key" } },
          { key: "expiresAt", header: "Works until", format: { as: "date" } },
          { key: "lastUsedAt", header: "Last used", format: { as: "time" } },
          { key: "createdAt", header: "Made", format: { as: "date" }, hidden: true },
          {
            key: "id",
            header: "Stop it",
            sortable: false,
            cell: (row) =>
              row.state === "working" ? (
                <Button look="danger" onClick={() => setRevoking(keys.find((key) => key.id === row.id))}>
                  Revoke
                </Button>
              ) : null,
          },
        ]}
        chips={[{ id: "working", name: "Working", key: "state", in: ["working"] }]}
        empty={{
          title: "No key yet",
          text: "A key lets a program read and upload in your name, sent as a bearer token to /api/v1.",
        }}
      />
      {revoking ? <RevokeDialog accessKey={revoking} onClose={() => setRevoking(undefined)} /> : null}
    </Card>
  );
}

function RevokeDialog({ accessKey, onClose }: { accessKey: AccessKeyView; onClose: () => void }) {
  const router = useRouter();
  const tell = useToast();
  return (
    <ConfirmDialog
      open
      onOpenChange={(open) => !open && onClose()}
      title={`Revoke ${accessKey.name}`}
      description="Programs that send it are refused at once. A revoked key never works again; make another one instead."
      confirm="Revoke the key"
      danger
      onConfirm={async () => {
        const result = await revokeKeyAction(accessKey.id);
        if (!result.ok) return result.problem;
        tell({ tone: "good", title: `${accessKey.name} is revoked` });
        router.refresh();
        return null;
      }}
    />
  );
}
