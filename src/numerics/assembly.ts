/** Bytes that a memory of WebAssembly grows by. */
const PAGE = 65_536;

/**
 * What `make` gives; `null` where the system grants no memory for WebAssembly: it takes gigabytes of addresses, though few
 * are ever used.
 */
export function whereGranted<T>(make: () => T): T | null {
  try {
    return make();
  } catch (error) {
    if (error instanceof RangeError) return null;
    throw error;
  }
}

/** Places in a memory, given out one behind the other from `end` on, each a multiple of `step`. */
export class Layout {
  constructor(
    private end: number,
    private readonly step: number,
  ) {}

  /** The address of the next `bytes` bytes. */
  place(bytes: number): number {
    const at = Math.ceil(this.end / this.step) * this.step;
    this.end = at + bytes;
    return at;
  }

  /** Makes a memory, or one that was made for less, as large as the layout; arrays on it before are lost. */
  over(memory?: WebAssembly.Memory): WebAssembly.Memory {
    const pages = Math.ceil(this.end / PAGE);
    if (memory === undefined) return new WebAssembly.Memory({ initial: pages });
    const missing = pages - memory.buffer.byteLength / PAGE;
    if (missing > 0) memory.grow(missing);
    return memory;
  }
}

/** A module of AssemblyScript, its bytes in base64, compiled when it is first needed. */
export class Assembly<Exports> {
  private module: WebAssembly.Module | null = null;

  constructor(private readonly base64: string) {}

  in(memory: WebAssembly.Memory): Exports {
    this.module ??= new WebAssembly.Module(Buffer.from(this.base64, 'base64'));
    return new WebAssembly.Instance(this.module, { env: { memory } }).exports as unknown as Exports;
  }
}
