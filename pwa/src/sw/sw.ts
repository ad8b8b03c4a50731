// Keeps the whole page on the phone, so that it opens with no server and no
// network at all. A new version is fetched beside the old one and waits: it
// takes over only when a person asks, and no incident is open (the page sees
// to that), never by itself.

export {};

const scope = self as unknown as ServiceWorkerGlobalScope;

/** Path and content hash of every file of the page; filled in by the build. */
const FILES = JSON.parse("__FILES__") as [path: string, hash: string][];
const PREFIX = "wakeback-";
const VERSION = `${PREFIX}__VERSION__`;
/** Large, and not needed to mark: a failure to fetch these does not stop the rest. */
const LATER = ["/engine.wasm", "/wasm_exec.js"];

scope.addEventListener("install", (e) => e.waitUntil(install()));
scope.addEventListener("activate", (e) => e.waitUntil(activate()));
scope.addEventListener("message", (e) => {
  if (e.data === "take_over") void scope.skipWaiting();
  if (e.data === "fill") e.waitUntil(fill(LATER_FILES()));
});
scope.addEventListener("fetch", (e) => {
  const url = new URL(e.request.url);
  const ours = url.origin === scope.location.origin && e.request.method === "GET";
  if (!ours || url.pathname.startsWith("/api/") || /^\/(healthz|readyz|metrics)$/.test(url.pathname)) return;
  e.respondWith(answer(e.request, url));
});

const LATER_FILES = (): [string, string][] => FILES.filter(([path]) => LATER.includes(path));

async function install(): Promise<void> {
  await fill(FILES.filter(([path]) => !LATER.includes(path)));
  await fill(LATER_FILES()).catch(() => {});
}

/** Puts files into this version's cache; those that did not change come from the version before. */
async function fill(files: [string, string][]): Promise<void> {
  const cache = await caches.open(VERSION);
  await Promise.all(
    files.map(async ([path, hash]) => {
      const key = keyOf(path, hash);
      if (await cache.match(key)) return;
      const had = await caches.match(key);
      const response = had ?? (await fetch(path, { cache: "no-cache" }));
      if (!response.ok) throw new Error(`${path}: HTTP ${response.status}`);
      await cache.put(key, response);
    }),
  );
}

const keyOf = (path: string, hash: string): string => `${path}?v=${hash}`;

async function activate(): Promise<void> {
  const names = await caches.keys();
  await Promise.all(names.filter((n) => n.startsWith(PREFIX) && n !== VERSION).map((n) => caches.delete(n)));
  await scope.clients.claim();
}

/** From the cache; a page address that is no file is the page itself. */
async function answer(request: Request, url: URL): Promise<Response> {
  const path = request.mode === "navigate" ? "/index.html" : url.pathname;
  const hash = FILES.find(([p]) => p === path)?.[1];
  if (hash === undefined) return fetch(request);
  const cache = await caches.open(VERSION);
  return (await cache.match(keyOf(path, hash))) ?? fetch(request);
}
