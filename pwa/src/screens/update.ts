// The service worker's side of the page: kept for use without network, and a
// new version that waits until a person asks for it and no incident is open.

import * as m from "../state/model";
import { live } from "../state/select";

let registration: ServiceWorkerRegistration | null = null;

/** Registers the worker and follows it. */
export async function keepOffline(): Promise<void> {
  if (!("serviceWorker" in navigator) || !window.isSecureContext) return;
  try {
    registration = await navigator.serviceWorker.register("/sw.js");
  } catch {
    return; // The readiness line says that the page is not kept.
  }
  if (!registration) return;
  const look = () => {
    m.offline.value = !!registration?.active;
    m.updateWaiting.value = !!registration?.waiting && !!navigator.serviceWorker.controller;
  };
  registration.addEventListener("updatefound", () => {
    registration?.installing?.addEventListener("statechange", look);
  });
  await navigator.serviceWorker.ready;
  look();
  registration.active?.postMessage("fill");
}

/** Changes to the new version, if nobody is in the water. */
export function takeUpdate(): void {
  if (live(m.incidents.value).length > 0 || !registration?.waiting) return;
  navigator.serviceWorker.addEventListener("controllerchange", () => location.reload(), { once: true });
  registration.waiting.postMessage("take_over");
}
