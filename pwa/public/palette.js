// Sets the palette before the first paint, so that no screen ever flashes.
// Runs before everything else and therefore stands alone.
(() => {
  const palettes = ["day", "dusk", "night"];
  let chosen = null;
  try {
    chosen = localStorage.getItem("wakeback.palette");
  } catch {
    // No storage: the system's wish decides.
  }
  if (!palettes.includes(chosen)) {
    chosen = matchMedia("(prefers-color-scheme: light)").matches ? "day" : "night";
  }
  document.documentElement.dataset.palette = chosen;
})();
