// Words by key. Catalogues have one shape; a missing key does not compile.

import { en } from "./en";

export type Key = keyof typeof en;
export type Catalogue = Record<Key, string>;
export type Args = Record<string, string | number>;

let catalogue: Catalogue = en;

/** Chooses the catalogue. */
export function useCatalogue(c: Catalogue): void {
  catalogue = c;
}

/** The words of a key, with {name} filled in. */
export function t(key: Key, args: Args = {}): string {
  return catalogue[key].replace(/\{(\w+)\}/g, (whole, name: string) =>
    name in args ? String(args[name]) : whole,
  );
}

/** Whether a catalogue has words for a key that came from outside, like an engine's code. */
export function isKey(key: string): key is Key {
  return Object.hasOwn(catalogue, key);
}
