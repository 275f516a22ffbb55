import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { EmptyState } from "@/app/_components/empty-state";

/** A serial that is in no lot. */
export default function UnknownSerial() {
  return (
    <Card>
      <EmptyState
        title="No device has this serial"
        action={
          <LinkButton href="/trace" look="primary">
            Look up another
          </LinkButton>
        }
      >
        Compare 0 with O and 1 with I. If the label is right, the device was made before its lot was entered here, or
        somewhere else: what it carries can still be found out with a dump of its memory.
      </EmptyState>
    </Card>
  );
}
