"use client";

import { Button, LinkButton } from "@/app/_components/button";
import { Notice } from "@/app/_components/notice";
import { TimeText } from "@/app/_components/time-text";
import type { DraftNews as News } from "./stored-draft";
import type { DraftConflict } from "./use-draft";

interface DraftNewsProps {
  news: News;
  family: string;
  /** Number of the draft that is open here. */
  draft: number | undefined;
  /** Something was typed that is not saved. */
  typed: boolean;
  onTake: (theirs: DraftConflict) => void;
  onCompare: (theirs: DraftConflict) => void;
  onReload: () => void;
}

/** Somebody saved another text of the draft that is open here, or it is no draft any more: said before a save meets it. */
export function DraftNews(props: DraftNewsProps) {
  const { news } = props;
  return (
    <div aria-live="polite">
      {news.kind === "text" ? <OtherText {...props} news={news} /> : <Closed {...props} news={news} />}
    </div>
  );
}

function OtherText({
  news,
  draft,
  typed,
  onTake,
  onCompare,
}: DraftNewsProps & { news: Extract<News, { kind: "text" }> }) {
  return (
    <Notice title={`${news.by} saved another text of this draft`}>
      <p className="mb-2">
        Draft {news.draft}, on <TimeText at={news.at} />. Open here is draft {draft}
        {typed ? ", and what you typed since; it is not saved until you choose." : "."}
      </p>
      <div className="flex flex-wrap gap-2">
        <Button look="outline" onClick={() => onTake(news)}>
          Take theirs
        </Button>
        <Button look="outline" onClick={() => onCompare(news)}>
          Look at both
        </Button>
      </div>
    </Notice>
  );
}

function Closed({ news, family, typed, onReload }: DraftNewsProps & { news: Extract<News, { kind: "closed" }> }) {
  const dropped = news.state === "dropped";
  return (
    <Notice tone="caution" title={closedTitle(news)}>
      <p className="mb-2">
        {news.at ? (
          <>
            On <TimeText at={news.at} />.{" "}
          </>
        ) : null}
        {typed
          ? "What you typed since is kept in this browser only; export it if it is to last."
          : "What is typed here can't be saved any more."}
      </p>
      {dropped ? (
        <LinkButton href={`/families/${family}/layouts`}>To the layouts of {family}</LinkButton>
      ) : (
        <Button look="outline" onClick={onReload}>
          Show it as it is now
        </Button>
      )}
    </Notice>
  );
}

function closedTitle({ state, by }: Extract<News, { kind: "closed" }>): string {
  if (state === "dropped") return "This draft was dropped";
  if (state === "in-review") return `${by ?? "Somebody"} asked for publishing this layout`;
  return `This layout is ${state} now`;
}
