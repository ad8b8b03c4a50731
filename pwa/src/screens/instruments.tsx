// The vessel's instruments as the server hears them: each feed, how it is, and
// what it said, counted.

import { useEffect, useState } from "preact/hooks";
import { type Feed, feedLine, readFeeds } from "../state/feeds";
import { t } from "../text/text";

/** How often the counts are read anew while the sheet is open. Our choice. */
const EVERY_MS = 3000;

export function Instruments() {
  const [feeds, setFeeds] = useState<Feed[] | null>(null);
  const [failed, setFailed] = useState(false);
  useEffect(() => {
    let open = true;
    const read = async () => {
      const got = await readFeeds();
      if (!open) return;
      setFailed(got === null);
      if (got) setFeeds(got);
    };
    void read();
    const timer = setInterval(() => void read(), EVERY_MS);
    return () => {
      open = false;
      clearInterval(timer);
    };
  }, []);
  return (
    <section>
      <h3>{t("feeds.title")}</h3>
      {failed && <p role="status">{t("feeds.unreached")}</p>}
      {feeds?.length === 0 && <p>{t("feeds.none")}</p>}
      <ul class="feeds">
        {feeds?.map((f) => {
          const line = feedLine(f, Date.now());
          return (
            <li key={f.url}>
              <b>{line.title}</b>
              <br />
              {line.counts}
            </li>
          );
        })}
      </ul>
    </section>
  );
}
