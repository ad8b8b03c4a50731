// The worker in which the wasm engine lives. It computes and never draws.

export {};

/** What wasm_exec.js and the engine put into this scope. */
type Scope = DedicatedWorkerGlobalScope & {
  Go?: new () => { importObject: WebAssembly.Imports; run(i: WebAssembly.Instance): Promise<void> };
  wakebackEngineReady?: () => void;
  wakebackEngine?: { call(name: string, json: string): string };
};

const scope = self as unknown as Scope;

interface Ask {
  id: number;
  name: string;
  json: string;
}

const waiting: Ask[] = [];
let ready = false;

scope.onmessage = (e: MessageEvent<Ask>) => {
  if (ready) answer(e.data);
  else waiting.push(e.data);
};

function answer(ask: Ask): void {
  try {
    const json = (scope.wakebackEngine as { call(n: string, j: string): string }).call(ask.name, ask.json);
    scope.postMessage({ id: ask.id, json });
  } catch (err) {
    scope.postMessage({ id: ask.id, died: String(err) });
  }
}

async function load(): Promise<void> {
  // wasm_exec.js comes from the Go distribution, as a file of its own.
  const runner = "/wasm_exec.js";
  await import(/* @vite-ignore */ runner);
  if (!scope.Go) throw new Error("wasm_exec.js did not define Go");
  const go = new scope.Go();
  const instance = await instantiate(go.importObject);
  await new Promise<void>((started, failed) => {
    scope.wakebackEngineReady = started;
    void go.run(instance).then(() => {
      failed(new Error("the engine ended"));
      scope.postMessage({ died: "the engine ended" });
    });
  });
  ready = true;
  scope.postMessage({ ready: true });
  for (const ask of waiting.splice(0)) answer(ask);
}

async function instantiate(imports: WebAssembly.Imports): Promise<WebAssembly.Instance> {
  const response = await fetch("/engine.wasm");
  if (!response.ok) throw new Error(`engine.wasm: HTTP ${response.status}`);
  if (response.headers.get("content-type")?.startsWith("application/wasm")) {
    return (await WebAssembly.instantiateStreaming(response, imports)).instance;
  }
  return (await WebAssembly.instantiate(await response.arrayBuffer(), imports)).instance;
}

load().catch((err: unknown) => scope.postMessage({ died: String(err) }));
