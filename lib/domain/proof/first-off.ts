/** What proof runs of a lot show about one layout read by one firmware: the first-off and every proof after it. */

/** A written device as a proof run judged it. */
export interface DeviceProof {
  serial: string;
  run: string;
  /** RFC 3339, UTC. */
  readAt: string;
  layout: string | null;
  firmware: string;
  state: "agrees" | "differs" | "not-judged";
  worst: { ratio: number } | null;
  shown: readonly { name: string; shown: boolean }[];
}

export interface FirstOffProof {
  layout: string;
  firmware: string;
  /** open: nothing judged; differs: the newest proof of a device contradicts its image. */
  state: "open" | "agrees" | "differs";
  /** The newest run that judged a device of it. */
  run: string | null;
  readAt: string | null;
  agreed: number;
  differed: number;
  worstRatio: number | null;
  /** Coefficients that at least one agreeing device showed to be applied, and those none did. */
  shown: string[];
  notShown: string[];
}

/** Where nothing was proven yet. */
export function openFirstOff(layout: string, firmware: string): FirstOffProof {
  return {
    layout,
    firmware,
    state: "open",
    run: null,
    readAt: null,
    agreed: 0,
    differed: 0,
    worstRatio: null,
    shown: [],
    notShown: [],
  };
}

/** The newest judgement of each device: a later proof takes the place of an earlier one. */
function newestOfEach(proofs: readonly DeviceProof[]): DeviceProof[] {
  const newest = new Map<string, DeviceProof>();
  for (const proof of proofs) {
    const known = newest.get(proof.serial);
    if (!known || proof.readAt > known.readAt) newest.set(proof.serial, proof);
  }
  return [...newest.values()];
}

function summarise(layout: string, firmware: string, proofs: readonly DeviceProof[]): FirstOffProof {
  const newest = newestOfEach(proofs);
  const agreeing = newest.filter((proof) => proof.state === "agrees");
  const last = newest.reduce((latest, proof) => (proof.readAt > latest.readAt ? proof : latest));
  const names = [...new Set(newest.flatMap((proof) => proof.shown.map((one) => one.name)))];
  const isShown = (name: string) => agreeing.some((proof) => proof.shown.some((one) => one.name === name && one.shown));
  return {
    layout,
    firmware,
    state: agreeing.length === newest.length ? "agrees" : "differs",
    run: last.run,
    readAt: last.readAt,
    agreed: agreeing.length,
    differed: newest.length - agreeing.length,
    worstRatio: Math.max(...newest.map((proof) => proof.worst?.ratio ?? 0)),
    shown: names.filter(isShown),
    notShown: names.filter((name) => !isShown(name)),
  };
}

/** A line for each layout and firmware that was judged, the newest first. */
export function summariseProofs(proofs: readonly DeviceProof[]): FirstOffProof[] {
  const groups = new Map<string, DeviceProof[]>();
  for (const proof of proofs) {
    if (proof.state === "not-judged" || proof.layout === null) continue;
    const key = JSON.stringify([proof.layout, proof.firmware]);
    groups.set(key, [...(groups.get(key) ?? []), proof]);
  }
  return [...groups.values()]
    .map((group) => summarise(group[0]?.layout as string, group[0]?.firmware as string, group))
    .sort((a, b) => (b.readAt as string).localeCompare(a.readAt as string));
}
