// What is loaded when a search is first wanted.

import "../plot/plot.css";

export { Search } from "./search";
export { follow } from "../state/search";
