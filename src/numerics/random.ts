import { threefry4x32 } from './threefry';
import { fillWords } from './xoshiro';
import { halfNormal } from './ziggurat';
const WORDS = 256;
export class RandomStream {
  readonly words = new Int32Array(WORDS);
  readonly lastPair = WORDS - 2;
  at = WORDS;
  state: Int32Array;
  constructor(seed: number, purpose: number, a: number, b: number) {
    this.state = threefry4x32([seed, seed/2**32, purpose, 0], [a, b, 0, 0]);
  }
  restart(seed: number, purpose: number, a: number, b: number) {
    this.state = threefry4x32([seed, seed/2**32, purpose, 0], [a, b, 0, 0]);
    this.at = WORDS;
  }
  refill() { fillWords(this.state, this.words); this.at = 0; }
  uniform() {
    if (this.at > this.lastPair) this.refill();
    const low = this.words[this.at++]!, high = this.words[this.at++]!;
    return ((high >>> 0) * 2**21 + (low >>> 11) + 0.5) * 2**-53;
  }
  halfNormal() { return halfNormal(this); }
}
