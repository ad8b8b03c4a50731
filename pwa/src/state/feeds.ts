// What the server says of its feeds, and the words for it.

import { t } from "../text/text";

/** One feed as /api/v1/status has it. */
export interface Feed {
  url: string;
  state: "connecting" | "live" | "silent" | "failed" | "ended";
  reason?: string;
  good: number;
  bad_checksum: number;
  malformed: number;
  unknown: number;
  ais_unread?: number;
  last_at?: string;
}

/** Reads the feeds; null when the server is not reached or refuses. */
export async function readFeeds(): Promise<Feed[] | null> {
  try {
    const response = await fetch("/api/v1/status");
    if (!response.ok) return null;
    const status = (await response.json()) as { feeds?: Feed[] | null };
    return status.feeds ?? [];
  } catch {
    return null;
  }
}

/** A feed in words: where and how it is, and what it said. */
export function feedLine(f: Feed, nowMs: number): { title: string; counts: string } {
  const state = t(`feeds.${f.state}`, { why: f.reason ?? "" });
  const bad = f.bad_checksum + f.malformed;
  const age = f.last_at ? Math.max(0, Math.round((nowMs - Date.parse(f.last_at)) / 1000)) : null;
  const counts = t("feeds.counts", { good: f.good, bad, unknown: f.unknown + (f.ais_unread ?? 0) });
  return {
    title: `${f.url}: ${state}`,
    counts: age === null ? counts : `${counts} ${t("feeds.last", { s: age })}`,
  };
}
