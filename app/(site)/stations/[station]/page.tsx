import type { Metadata } from "next";
import Link from "next/link";
import { notFound } from "next/navigation";
import { Card } from "@/app/_components/card";
import { stateOf } from "@/app/_components/state/state-of";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { WriteRecords } from "@/app/_components/write-records";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import { hasOneTimeCode } from "@/lib/services/account/has-one-time-code";
import { listFamilies } from "@/lib/services/families/get-family";
import { getStation } from "@/lib/services/stations/manage-stations";
import { byId } from "@/schemas/api/common";
import { KeyList } from "./key-list";
import { StationActions } from "./station-actions";

export const metadata: Metadata = { title: "Station" };

interface PageProps {
  params: Promise<{ station: string }>;
}

/** One station with its keys and everything it reported. */
export default async function StationPage({ params }: PageProps) {
  const ctx = await pageContext();
  const given = byId.safeParse({ id: (await params).station });
  if (!given.success) notFound();
  const station = await orNotFound(getStation(ctx, given.data.id));
  const admin = holds(ctx, "admin");
  const families = admin ? (await listFamilies(ctx, { limit: 1_000 })).items.map((family) => family.code) : [];
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Stations", href: "/stations" }, { name: station.name }]}
        title={station.name}
        state={stateOf("station", station.active ? "active" : "stopped")}
        note={
          station.lastSeenAt ? (
            <>
              last seen <TimeText at={station.lastSeenAt} />
            </>
          ) : (
            "never seen yet"
          )
        }
        actions={admin ? <StationActions station={station} families={families} /> : undefined}
      />
      <div className="flex flex-col gap-[18px]">
        <div className="grid grid-cols-1 items-start gap-[18px] lg:grid-cols-[minmax(240px,1fr)_minmax(0,2fr)]">
          <Card title="May write">
            <ul className="flex flex-wrap gap-x-4 gap-y-1">
              {station.families.map((code) => (
                <li key={code}>
                  <Link href={`/families/${code}`} className="font-mono">
                    {code}
                  </Link>
                </li>
              ))}
            </ul>
            <p className="mt-3 text-sm text-ink-soft">
              It gets what is live of these families' lots. Without a newer answer it stops after a day.
            </p>
          </Card>
          <KeyList station={station} admin={admin} oneTimeCode={admin && (await hasOneTimeCode(ctx))} />
        </div>
        <Card title="What it reported">
          <WriteRecords
            endpoint={`/api/v1/stations/${station.id}/writes`}
            name={`writes of ${station.name}`}
            ofOneStation
            empty={{
              title: "No records yet",
              text: "Once it has a key and writes its first device, the record stands here.",
            }}
          />
        </Card>
      </div>
    </>
  );
}
