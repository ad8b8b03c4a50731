import { defineConfig } from "vitest/config";

// Everything is a file of its own: the content security policy allows no
// inline script or style, so nothing may be inlined.
export default defineConfig({
  build: {
    target: "es2022",
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    reportCompressedSize: false,
    emptyOutDir: true,
    rollupOptions: {
      input: { index: "index.html", sw: "src/sw/sw.ts" },
      output: {
        entryFileNames: (chunk) => (chunk.name === "sw" ? "sw.js" : "assets/[name]-[hash].js"),
      },
    },
  },
  worker: { format: "es" },
  test: { include: ["src/**/*.test.ts", "src/**/*.test.tsx", "test/**/*.test.ts"] },
});
