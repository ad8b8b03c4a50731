// Draws the icon that some phones want as pixels from public/icon.svg. Run by hand
// when the drawing changes: node script/icons.mjs

import { readFileSync } from "node:fs";
import { launch } from "./browser.mjs";

const folder = new URL("../public/", import.meta.url).pathname;
const svg = readFileSync(`${folder}icon.svg`, "utf8");
const browser = await launch();
for (const size of [192]) {
  const page = await browser.newPage({ viewport: { width: size, height: size } });
  await page.setContent(`<body style="margin:0">${svg.replace("<svg ", `<svg width="${size}" height="${size}" style="display:block" `)}</body>`);
  await page.screenshot({ path: `${folder}icon-${size}.png` });
}
await browser.close();
