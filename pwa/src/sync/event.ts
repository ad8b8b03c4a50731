// Making events: identity, the link to the device's event before, the hash.

import type { Draft, LogEvent } from "../wire/event";
import { canonical, cleaned } from "./canonical";
import { sha256Hex } from "./sha256";

/** The end of a device's chain: what the next event links to. */
export interface Chain {
  device: string;
  next_seq: number;
  last_hash: string;
}

/** A UUIDv7 (RFC 9562, section 5.7): 48 bits of Unix milliseconds, then chance. */
export function uuidv7(ms: number, random = crypto.getRandomValues(new Uint8Array(16))): string {
  const bytes = new Uint8Array(random);
  for (let i = 0; i < 6; i++) bytes[i] = Math.floor(ms / 2 ** (8 * (5 - i))) & 0xff;
  bytes[6] = ((bytes[6] as number) & 0x0f) | 0x70;
  bytes[8] = ((bytes[8] as number) & 0x3f) | 0x80;
  const hex = Array.from(bytes, (b) => b.toString(16).padStart(2, "0")).join("");
  return [hex.slice(0, 8), hex.slice(8, 12), hex.slice(12, 16), hex.slice(16, 20), hex.slice(20)].join("-");
}

/** The hash of an event: all but hash, seq and received_at, empty members left out. */
export function hashOf(event: Omit<LogEvent, "hash">): string {
  const hashed: Record<string, unknown> = {
    id: event.id,
    incident: event.incident,
    device: event.device,
    device_seq: event.device_seq,
    prev_hash: event.prev_hash,
    kind: event.kind,
    at: new Date(event.at).toISOString(),
    device_at: new Date(event.device_at).toISOString(),
    clock_error_ms: event.clock_error_ms,
    by: event.by || undefined,
    drill: event.drill || undefined,
    test: event.test || undefined,
    body: event.body,
  };
  return sha256Hex(canonical(hashed));
}

/** Gives a draft its place in the chain, and the chain its new end. */
export function seal(draft: Draft, chain: Chain): { event: LogEvent; chain: Chain } {
  const body = cleaned({ ...draft, device: chain.device, device_seq: chain.next_seq, prev_hash: chain.last_hash });
  const event: LogEvent = { ...body, hash: hashOf(body) };
  return { event, chain: { device: chain.device, next_seq: chain.next_seq + 1, last_hash: event.hash } };
}
