// The way to the search screen. The screen and its plot come when they are
// first wanted, so that they cost nothing until MARK works.

import { signal } from "@preact/signals";
import type { ComponentType } from "preact";
import { useEffect, useRef } from "preact/hooks";
import * as m from "../state/model";
import { pickFrame } from "../state/frames";
import { running } from "../state/search_view";
import type { Selection } from "../state/select";
import { keepTrack } from "../state/track";
import { t } from "../text/text";
import "./search_door.css";

/** The incident whose search is on the screen, "" for the ring. */
export const searching = signal("");

type Screens = typeof import("./plot_screens");

const screens = signal<Screens | null>(null);
const trouble = signal("");
let loading: Promise<void> | null = null;

/** Loads the screen; a failure is tried again at the next wish. */
function load(): void {
  if (screens.value || loading) return;
  loading = import("./plot_screens")
    .then((s) => {
      screens.value = s;
      trouble.value = "";
    })
    .catch(() => {
      trouble.value = t("search.not_loaded");
    })
    .finally(() => {
      loading = null;
    });
}

keepTrack();

/** Opens the search screen. */
export function openSearch(incident: string): void {
  m.sheet.value = "";
  searching.value = incident;
  load();
}

/** The search screen is wanted for this selection, and is here. */
export const showsSearch = (s: Selection): boolean => searching.value === s.state.id && !!screens.value;

/** The screen, once loaded. */
export function SearchScreen({ selection }: { selection: Selection }) {
  const Screen: ComponentType<{ selection: Selection; close: () => void }> | undefined = screens.value?.Search;
  return Screen ? <Screen selection={selection} close={() => (searching.value = "")} /> : null;
}

/** Keeps a running search going, whatever screen is up: loaded ahead, legs moved on. */
export function useSearchKeeper(selection: Selection | null): void {
  const runs = !!selection && running(selection.state) !== null;
  const open = !!selection;
  useEffect(() => {
    // An incident is open: the screen is fetched in the quiet, to be there when the server is not.
    if (open) load();
  }, [open]);
  // One more mark, by anyone: every phone shows the ring, which says where to.
  const marks = selection?.state.marks.length ?? 0;
  const before = useRef(marks);
  useEffect(() => {
    if (marks > before.current) searching.value = "";
    before.current = marks;
  }, [marks]);
  const held = selection && runs ? pickFrame(selection, m.serverFrames.value, m.ownFrame.value, m.nowMs.value).held : null;
  useEffect(() => {
    if (selection && runs) screens.value?.follow(selection, held?.frame ?? null);
  });
}

/** The touch that leads here; said loudly when looking is the thing to do. */
export function SearchTouch({ selection, loud }: { selection: Selection; loud: boolean }) {
  const word = t(running(selection.state) ? "search.open_running" : "search.open");
  return (
    <button type="button" class={loud ? "search-touch loud" : "search-touch"} onClick={() => openSearch(selection.state.id)}>
      {trouble.value || word}
    </button>
  );
}
