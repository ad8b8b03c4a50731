// What is loaded when a search is first wanted.

import "./plot.css";

export { Search } from "../screens/search";
export { follow } from "../state/search";
