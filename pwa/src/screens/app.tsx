// Which screen is shown: return while someone has to be found or brought
// aboard, ready otherwise. Nobody has to choose it.

import { useEffect } from "preact/hooks";
import * as m from "../state/model";
import { select } from "../state/select";
import { t } from "../text/text";
import { Log } from "./log";
import { Ready } from "./ready";
import { Return } from "./return";
import { SearchScreen, showsSearch, useSearchKeeper } from "./search_door";
import { SetUp } from "./setup";

export function App() {
  const selection = select(m.incidents.value, m.chosen.value);
  const drill = selection ? !!selection.state.drill : m.drill.value;
  const screen = selection ? t("return.title") : t("ready.title");
  useSearchKeeper(selection);
  useEffect(() => {
    document.title = [drill ? t("app.drill") : "", screen, t("app.title")].filter(Boolean).join(" - ");
    document.documentElement.classList.toggle("drill", drill);
  }, [drill, screen]);
  return (
    <>
      {selection ? showsSearch(selection) ? <SearchScreen selection={selection} /> : <Return selection={selection} /> : <Ready />}
      {m.sheet.value === "log" && <Log selection={selection} />}
      {m.sheet.value === "setup" && <SetUp selection={selection} />}
      {drill && (
        <div class="stripes" aria-hidden="true">
          <span>{t("app.drill")}</span>
        </div>
      )}
    </>
  );
}
