import { InputError } from '../study/input-error';
import { isMissing } from './number';

/** Most different labels of one text column: beyond it the column is no label but a text of its own in every row. */
export const MOST_LABELS_READ = 1_000_000;

const MISSING = -1;
const EMPTY_SLOT = -1;
/** 32-bit FNV-1a (Fowler, Noll and Vo): short keys hashed byte by byte. */
const FNV_OFFSET = 0x811c9dc5;
const FNV_PRIME = 0x01000193;

/**
 * Labels of a text column, each once, in the order of their first appearance; a row holds the code of its label. Known
 * labels are found by their bytes, so that no string is made for a row.
 */
export class Dictionary {
  readonly labels: string[] = [];
  private readonly codesOfText = new Map<string, number>();
  /** Spellings: bytes once met, of which several may stand for one label (two encodings of it). */
  private spellings: { from: number; to: number; hash: number; code: number }[] = [];
  private slots = new Int32Array(64).fill(EMPTY_SLOT);
  private store = new Uint8Array(1024);
  private stored = 0;

  /** `file` and `column` name the column where it has too many labels. */
  constructor(
    private readonly file: string,
    private readonly column: string,
  ) {}

  /** The code of the label `bytes[from, to)`; -1 for a missing value. Throws `InputError` beyond `MOST_LABELS_READ`. */
  code(bytes: Uint8Array, from: number, to: number): number {
    let hash = FNV_OFFSET;
    for (let p = from; p < to; p++) hash = Math.imul(hash ^ bytes[p], FNV_PRIME);
    const mask = this.slots.length - 1;
    let slot = (hash ^ (hash >>> 15)) & mask;
    for (; this.slots[slot] !== EMPTY_SLOT; slot = (slot + 1) & mask) {
      const known = this.spellings[this.slots[slot]];
      if (known.hash === hash && this.same(known.from, known.to, bytes, from, to)) return known.code;
    }
    const code = isMissing(bytes, from, to) ? MISSING : this.codeOfText(decode(bytes.subarray(from, to)));
    this.remember(bytes.subarray(from, to), hash, code, slot);
    return code;
  }

  /** The code of a label that is a string already, blanks around it set aside. */
  codeOfText(text: string): number {
    const label = text.trim();
    const known = this.codesOfText.get(label);
    if (known !== undefined) return known;
    const code = isMissingText(label) ? MISSING : this.labels.length;
    if (code >= MOST_LABELS_READ) this.refuse();
    if (code !== MISSING) this.labels.push(label);
    this.codesOfText.set(label, code);
    return code;
  }

  private refuse(): never {
    const what = `column "${this.column}" holds more than ${MOST_LABELS_READ} different labels`;
    throw new InputError(this.file, what, 'choose a column that names runs or classes');
  }

  private same(from: number, to: number, bytes: Uint8Array, begin: number, end: number): boolean {
    if (to - from !== end - begin) return false;
    for (let i = from, p = begin; i < to; i++, p++) if (this.store[i] !== bytes[p]) return false;
    return true;
  }

  private remember(spelling: Uint8Array, hash: number, code: number, slot: number): void {
    const from = this.stored;
    const to = from + spelling.length;
    if (to > this.store.length) this.store = grown(this.store, to);
    this.store.set(spelling, from);
    this.stored = to;
    this.slots[slot] = this.spellings.length;
    this.spellings.push({ from, to, hash, code });
    if (this.spellings.length * 2 > this.slots.length) this.rehash();
  }

  private rehash(): void {
    this.slots = new Int32Array(this.slots.length * 2).fill(EMPTY_SLOT);
    const mask = this.slots.length - 1;
    this.spellings.forEach(({ hash }, i) => {
      let slot = (hash ^ (hash >>> 15)) & mask;
      while (this.slots[slot] !== EMPTY_SLOT) slot = (slot + 1) & mask;
      this.slots[slot] = i;
    });
  }
}

function grown(store: Uint8Array, least: number): Uint8Array<ArrayBuffer> {
  const larger = new Uint8Array(Math.max(least, store.length * 2));
  larger.set(store);
  return larger;
}

const MISSING_TEXT = /^(|null|[+-]?nan)$/i;

function isMissingText(text: string): boolean {
  return text.length <= 4 && MISSING_TEXT.test(text);
}

const utf8 = new TextDecoder('utf-8', { fatal: true });
const latin1 = new TextDecoder('latin1');

/** UTF-8, or where the bytes are none, the Windows code page that European programs still write (WHATWG `latin1`). */
export function decode(bytes: Uint8Array): string {
  try {
    return utf8.decode(bytes);
  } catch {
    return latin1.decode(bytes);
  }
}
