import { wordAt } from './word';

/**
 * XXH64 with seed 0 (Yann Collet's published specification, "xxHash fast digest algorithm", version 0.1.1), the checksum
 * of zstd frames. 64-bit words are kept as pairs of 32-bit halves: BigInt would be slower by more than an order.
 */
export class XxHash64 {
  /** Four accumulators, low half first. */
  private readonly lanes = Int32Array.of(0, 0, P2L, P2H, 0, 0, -P1L, ~P1H);
  private readonly pending = new Uint8Array(STRIPE);
  private held = 0;
  private length = 0;

  constructor() {
    add(this.lanes, 0, P1L, P1H, P2L, P2H);
  }

  update(bytes: Uint8Array): void {
    this.length += bytes.length;
    let p = 0;
    if (this.held > 0) {
      p = Math.min(STRIPE - this.held, bytes.length);
      this.pending.set(bytes.subarray(0, p), this.held);
      this.held += p;
      if (this.held < STRIPE) return;
      this.stripes(this.pending, 0, STRIPE);
      this.held = 0;
    }
    const whole = p + Math.floor((bytes.length - p) / STRIPE) * STRIPE;
    this.stripes(bytes, p, whole);
    this.held = bytes.length - whole;
    this.pending.set(bytes.subarray(whole));
  }

  /** The 64-bit digest as two halves, `high` and `low`. */
  digest(): { high: number; low: number } {
    const { lanes, pending, held } = this;
    const h = new Int32Array(2);
    if (this.length >= STRIPE) mergeLanes(h, lanes);
    else add(h, 0, 0, 0, P5L, P5H);
    add(h, 0, h[0], h[1], this.length | 0, Math.floor(this.length / 2 ** 32));
    finishTail(h, pending, held);
    return avalanche(h);
  }

  private stripes(bytes: Uint8Array, from: number, to: number): void {
    for (let p = from; p < to; p += STRIPE) {
      for (let lane = 0; lane < 4; lane++) {
        round(this.lanes, lane * 2, wordAt(bytes, p + lane * 8), wordAt(bytes, p + lane * 8 + 4));
      }
    }
  }
}

const STRIPE = 32;
const [P1H, P1L] = [0x9e3779b1 | 0, 0x85ebca87 | 0];
const [P2H, P2L] = [0xc2b2ae3d | 0, 0x27d4eb4f | 0];
const [P3H, P3L] = [0x165667b1 | 0, 0x9e3779f9 | 0];
const [P4H, P4L] = [0x85ebca77 | 0, 0xc2b2ae63 | 0];
const [P5H, P5L] = [0x27d4eb2f | 0, 0x165667c5 | 0];

function mergeLanes(h: Int32Array, lanes: Int32Array): void {
  [1, 7, 12, 18].forEach((turn, lane) => {
    const at = lane * 2;
    add(h, 0, h[0], h[1], (lanes[at] << turn) | (lanes[at + 1] >>> (32 - turn)), rotatedHigh(lanes, at, turn));
  });
  for (let lane = 0; lane < 4; lane++) {
    const k = new Int32Array(2);
    round(k, 0, lanes[lane * 2], lanes[lane * 2 + 1]);
    h[0] ^= k[0];
    h[1] ^= k[1];
    multiply(h, 0, P1L, P1H);
    add(h, 0, h[0], h[1], P4L, P4H);
  }
}

function finishTail(h: Int32Array, bytes: Uint8Array, length: number): void {
  let p = 0;
  for (; p + 8 <= length; p += 8) {
    const k = new Int32Array(2);
    round(k, 0, wordAt(bytes, p), wordAt(bytes, p + 4));
    mixIn(h, k[0], k[1], 27, P1L, P1H);
    add(h, 0, h[0], h[1], P4L, P4H);
  }
  if (p + 4 <= length) {
    const k = Int32Array.of(wordAt(bytes, p), 0);
    multiply(k, 0, P1L, P1H);
    mixIn(h, k[0], k[1], 23, P2L, P2H);
    add(h, 0, h[0], h[1], P3L, P3H);
    p += 4;
  }
  for (; p < length; p++) {
    const k = Int32Array.of(bytes[p], 0);
    multiply(k, 0, P5L, P5H);
    mixIn(h, k[0], k[1], 11, P1L, P1H);
  }
}

function avalanche(h: Int32Array): { high: number; low: number } {
  // A shift by 33 moves one bit beyond the high half.
  h[0] ^= h[1] >>> 1;
  multiply(h, 0, P2L, P2H);
  const [low, high] = h;
  h[0] ^= (low >>> 29) | (high << 3);
  h[1] ^= high >>> 29;
  multiply(h, 0, P3L, P3H);
  h[0] ^= h[1];
  return { high: h[1] >>> 0, low: h[0] >>> 0 };
}

/** `h = rotate(h ^ k, turn) * multiplier`. */
function mixIn(h: Int32Array, low: number, high: number, turn: number, byLow: number, byHigh: number): void {
  h[0] ^= low;
  h[1] ^= high;
  rotate(h, 0, turn);
  multiply(h, 0, byLow, byHigh);
}

/** `x[at] = rotate(x[at] + lane * P2, 31) * P1`. */
function round(x: Int32Array, at: number, low: number, high: number): void {
  const productLow = Math.imul(low, P2L);
  const productHigh = (highProduct(low, P2L) + Math.imul(high, P2L) + Math.imul(low, P2H)) | 0;
  add(x, at, x[at], x[at + 1], productLow, productHigh);
  rotate(x, at, 31);
  multiply(x, at, P1L, P1H);
}

function add(x: Int32Array, at: number, aLow: number, aHigh: number, bLow: number, bHigh: number): void {
  const low = (aLow >>> 0) + (bLow >>> 0);
  x[at] = low;
  x[at + 1] = aHigh + bHigh + (low > 0xffffffff ? 1 : 0);
}

function rotate(x: Int32Array, at: number, turn: number): void {
  const low = (x[at] << turn) | (x[at + 1] >>> (32 - turn));
  x[at + 1] = rotatedHigh(x, at, turn);
  x[at] = low;
}

function rotatedHigh(x: Int32Array, at: number, turn: number): number {
  return (x[at + 1] << turn) | (x[at] >>> (32 - turn));
}

function multiply(x: Int32Array, at: number, byLow: number, byHigh: number): void {
  const low = x[at];
  x[at + 1] = highProduct(low, byLow) + Math.imul(x[at + 1], byLow) + Math.imul(low, byHigh);
  x[at] = Math.imul(low, byLow);
}

/** The upper 32 bits of the product of two unsigned 32-bit numbers. */
function highProduct(a: number, b: number): number {
  const aLow = a & 0xffff;
  const aHigh = a >>> 16;
  const bLow = b & 0xffff;
  const bHigh = b >>> 16;
  const inner = Math.imul(aLow, bHigh) >>> 0;
  const outer = Math.imul(aHigh, bLow) >>> 0;
  const carry = (Math.imul(aLow, bLow) >>> 16) + (inner & 0xffff) + (outer & 0xffff);
  return (Math.imul(aHigh, bHigh) + (inner >>> 16) + (outer >>> 16) + (carry >>> 16)) | 0;
}
