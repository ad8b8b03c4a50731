// Whether this phone will keep what is written to it.

export interface StorageState {
  /** The phone promised not to clear it; null while not known. */
  persisted: boolean | null;
  /** Bytes left, if the browser says. */
  left: number | null;
}

/** Asks for lasting storage and how much is left. */
export async function askStorage(): Promise<StorageState> {
  const s = navigator.storage;
  if (!s) return { persisted: false, left: null };
  const persisted = await (s.persist?.() ?? Promise.resolve(false)).catch(() => false);
  const estimate = await (s.estimate?.() ?? Promise.resolve(null)).catch(() => null);
  const left =
    estimate?.quota !== undefined && estimate.usage !== undefined ? estimate.quota - estimate.usage : null;
  return { persisted, left };
}
