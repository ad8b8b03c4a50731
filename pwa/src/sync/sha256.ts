// SHA-256 (FIPS 180-4) without waiting: the browser's own digest is a promise,
// and a promise inside an IndexedDB transaction lets the transaction end
// before the event that needs the hash is written.

/** Round constants: FIPS 180-4, section 4.2.2. */
const K = new Uint32Array([
  0x428a2f98, 0x71374491, 0xb5c0fbcf, 0xe9b5dba5, 0x3956c25b, 0x59f111f1, 0x923f82a4, 0xab1c5ed5,
  0xd807aa98, 0x12835b01, 0x243185be, 0x550c7dc3, 0x72be5d74, 0x80deb1fe, 0x9bdc06a7, 0xc19bf174,
  0xe49b69c1, 0xefbe4786, 0x0fc19dc6, 0x240ca1cc, 0x2de92c6f, 0x4a7484aa, 0x5cb0a9dc, 0x76f988da,
  0x983e5152, 0xa831c66d, 0xb00327c8, 0xbf597fc7, 0xc6e00bf3, 0xd5a79147, 0x06ca6351, 0x14292967,
  0x27b70a85, 0x2e1b2138, 0x4d2c6dfc, 0x53380d13, 0x650a7354, 0x766a0abb, 0x81c2c92e, 0x92722c85,
  0xa2bfe8a1, 0xa81a664b, 0xc24b8b70, 0xc76c51a3, 0xd192e819, 0xd6990624, 0xf40e3585, 0x106aa070,
  0x19a4c116, 0x1e376c08, 0x2748774c, 0x34b0bcb5, 0x391c0cb3, 0x4ed8aa4a, 0x5b9cca4f, 0x682e6ff3,
  0x748f82ee, 0x78a5636f, 0x84c87814, 0x8cc70208, 0x90befffa, 0xa4506ceb, 0xbef9a3f7, 0xc67178f2,
]);

const rotr = (x: number, n: number): number => (x >>> n) | (x << (32 - n));

/** Lower-case hexadecimal SHA-256 of the UTF-8 bytes of a text. */
export function sha256Hex(text: string): string {
  const padded = pad(new TextEncoder().encode(text));
  const view = new DataView(padded.buffer);
  // Initial values: FIPS 180-4, section 5.3.3.
  const hash = new Uint32Array([
    0x6a09e667, 0xbb67ae85, 0x3c6ef372, 0xa54ff53a, 0x510e527f, 0x9b05688c, 0x1f83d9ab, 0x5be0cd19,
  ]);
  const w = new Uint32Array(64);
  for (let at = 0; at < padded.length; at += 64) block(view, at, hash, w);
  return Array.from(hash, (x) => x.toString(16).padStart(8, "0")).join("");
}

/** Padding: FIPS 180-4, section 5.1.1. */
function pad(bytes: Uint8Array): Uint8Array<ArrayBuffer> {
  const out = new Uint8Array((((bytes.length + 8) >> 6) + 1) << 6);
  out.set(bytes);
  out[bytes.length] = 0x80;
  const view = new DataView(out.buffer);
  view.setUint32(out.length - 8, Math.floor(bytes.length / 0x20000000));
  view.setUint32(out.length - 4, bytes.length << 3);
  return out;
}

/** One block: FIPS 180-4, section 6.2.2, with the letters used there. */
function block(view: DataView, at: number, hash: Uint32Array, w: Uint32Array): void {
  for (let t = 0; t < 16; t++) w[t] = view.getUint32(at + 4 * t);
  for (let t = 16; t < 64; t++) {
    const x = w[t - 15] as number;
    const y = w[t - 2] as number;
    const s0 = rotr(x, 7) ^ rotr(x, 18) ^ (x >>> 3);
    const s1 = rotr(y, 17) ^ rotr(y, 19) ^ (y >>> 10);
    w[t] = (w[t - 16] as number) + s0 + (w[t - 7] as number) + s1;
  }
  let [a, b, c, d, e, f, g, h] = hash as unknown as [
    number, number, number, number, number, number, number, number,
  ];
  for (let t = 0; t < 64; t++) {
    const s1 = rotr(e, 6) ^ rotr(e, 11) ^ rotr(e, 25);
    const t1 = (h + s1 + ((e & f) ^ (~e & g)) + (K[t] as number) + (w[t] as number)) | 0;
    const s0 = rotr(a, 2) ^ rotr(a, 13) ^ rotr(a, 22);
    const t2 = (s0 + ((a & b) ^ (a & c) ^ (b & c))) | 0;
    [h, g, f, e, d, c, b, a] = [g, f, e, (d + t1) | 0, c, b, a, (t1 + t2) | 0];
  }
  [a, b, c, d, e, f, g, h].forEach((x, i) => {
    hash[i] = (hash[i] as number) + x;
  });
}
