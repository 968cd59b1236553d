/** A value that NumPy writes into the header of an array: what `ast.literal_eval` would make of it. */
export type PythonLiteral = string | number | boolean | null | PythonLiteral[] | { [key: string]: PythonLiteral };

/** A header nests a few levels deep; more is made to exhaust the stack. */
const DEEPEST = 32;
const ESCAPES: Record<string, string> = { n: '\n', t: '\t', r: '\r', '\\': '\\', "'": "'", '"': '"' };
const NUMBER = /[+-]?\d+(\.\d*)?([eE][+-]?\d+)?L?/y;
const WORD = /True|False|None/y;
const WORDS: Record<string, boolean | null> = { True: true, False: false, None: null };

/**
 * Reads one Python literal: strings, numbers, `True`, `False`, `None`, lists, tuples (as lists) and dictionaries with
 * strings as keys. Nothing is executed. Throws `SyntaxError` with the place of anything else.
 */
export function parsePythonLiteral(text: string): PythonLiteral {
  const parser = new Parser(text);
  const value = parser.value(0);
  parser.end();
  return value;
}

class Parser {
  private at = 0;

  constructor(private readonly text: string) {}

  end(): void {
    this.blanks();
    if (this.at < this.text.length) this.fail();
  }

  value(depth: number): PythonLiteral {
    if (depth > DEEPEST) this.fail();
    this.blanks();
    const sign = this.text[this.at];
    if (sign === '{') return this.dictionary(depth);
    if (sign === '[') return this.list(']', depth);
    if (sign === '(') return this.list(')', depth);
    const word = this.match(WORD);
    if (word !== null) return WORDS[word];
    const number = this.match(NUMBER);
    if (number !== null) return Number(number.replace('L', ''));
    return this.string();
  }

  private list(close: string, depth: number): PythonLiteral[] {
    const items: PythonLiteral[] = [];
    this.at++;
    while (!this.take(close)) {
      items.push(this.value(depth + 1));
      if (!this.take(',') && !this.peek(close)) this.fail();
    }
    return items;
  }

  private dictionary(depth: number): { [key: string]: PythonLiteral } {
    const entries: [string, PythonLiteral][] = [];
    this.at++;
    while (!this.take('}')) {
      this.blanks();
      const key = this.string();
      if (!this.take(':')) this.fail();
      entries.push([key, this.value(depth + 1)]);
      if (!this.take(',') && !this.peek('}')) this.fail();
    }
    return Object.fromEntries(entries);
  }

  private string(): string {
    if (/[ub]/.test(this.text[this.at] ?? '') && /['"]/.test(this.text[this.at + 1] ?? '')) this.at++;
    const quote = this.text[this.at];
    if (quote !== "'" && quote !== '"') this.fail();
    let value = '';
    for (this.at++; this.text[this.at] !== quote; this.at++) {
      if (this.at >= this.text.length) this.fail();
      value += this.text[this.at] === '\\' ? this.escape() : this.text[this.at];
    }
    this.at++;
    return value;
  }

  private escape(): string {
    const sign = this.text[++this.at];
    const digits = { x: 2, u: 4, U: 8 }[sign];
    if (digits === undefined) return ESCAPES[sign] ?? this.fail();
    const hexadecimal = this.text.slice(this.at + 1, this.at + 1 + digits);
    if (!new RegExp(`^[0-9a-fA-F]{${digits}}$`).test(hexadecimal) || parseInt(hexadecimal, 16) > 0x10ffff) this.fail();
    this.at += digits;
    return String.fromCodePoint(parseInt(hexadecimal, 16));
  }

  private take(sign: string): boolean {
    const found = this.peek(sign);
    if (found) this.at++;
    return found;
  }

  private peek(sign: string): boolean {
    this.blanks();
    return this.text[this.at] === sign;
  }

  private match(pattern: RegExp): string | null {
    pattern.lastIndex = this.at;
    const found = pattern.exec(this.text);
    if (found === null) return null;
    this.at += found[0].length;
    return found[0];
  }

  private blanks(): void {
    while (/\s/.test(this.text[this.at] ?? '')) this.at++;
  }

  private fail(): never {
    throw new SyntaxError(`unexpected ${this.text[this.at] ?? 'end'} at ${this.at}`);
  }
}
