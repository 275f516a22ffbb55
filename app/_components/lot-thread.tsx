import { type Stitch, Thread } from "@/app/_components/thread";
import type { LotThread as LotThreadData, ThreadStitch } from "@/lib/services/lots/get-lot-thread";

const order = ["serials", "readings", "coefficients", "package", "review", "written"] as const;

/** A lot's thread with its links. `current` is the stitch of the page shown. */
export function LotThread({ thread, current }: { thread: LotThreadData; current?: (typeof order)[number] }) {
  const base = `/lots/${encodeURIComponent(thread.lot)}`;
  const packages = `${base}/packages`;
  const review = thread.newestPackageId === null ? undefined : `/packages/${thread.newestPackageId}/review`;
  const link = (stitch: ThreadStitch, href: string | undefined): Stitch => ({ ...stitch, href });
  return (
    <Thread
      current={current === undefined ? undefined : order.indexOf(current)}
      stitches={[
        link(thread.serials, base),
        link(thread.readings, `${base}/readings`),
        link(thread.coefficients, `${base}/coefficients`),
        link(thread.package, packages),
        link(thread.review, review),
        link(thread.written, `${base}/writes`),
      ]}
    />
  );
}
