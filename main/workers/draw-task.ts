import { closeSync, openSync, readSync, writeSync } from 'node:fs';
import { BLOCK, drawColumns, type SamplerParameters } from '../../src/ensemble/draw';
import { cannotWrite } from '../../src/handover/folder-in-the-making';
import { InputError } from '../../src/study/input-error';
import type { Handlers } from './serve';

/** The calls of a draw worker. */
export type DrawCalls = {
  begin: { argument: BeginDrawing; result: null };
  /** Draws one block into its place in the file. */
  write: { argument: { block: number }; result: null };
  /** Draws one block again and compares it with the file, to the bit. */
  check: { argument: { block: number }; result: Mismatch | null };
  end: { argument: null; result: null };
};

export interface BeginDrawing {
  parameters: SamplerParameters;
  seed: number;
  replicas: number;
  path: string;
  /** Where the numbers begin in the file, in bytes. */
  dataStart: number;
  mode: 'write' | 'check';
  /** Names the place in errors, where the file stands elsewhere until it is whole. */
  place: string;
}

/** The first cell of a block that is not what the seed and the tally give. */
export interface Mismatch {
  replica: number;
  column: number;
  outcome: number;
  found: number;
  expected: number;
}

/** Most bytes drawn at once: memory of a worker stays bounded for any matrix. */
const MOST_BYTES = 32 << 20;

/** What a draw worker does: blocks of replicas, drawn and written (or compared) in place. */
export function drawTask(): Handlers<DrawCalls> {
  let drawing: Drawing | null = null;
  return {
    begin(argument) {
      drawing = new Drawing(argument);
      return { result: null };
    },
    write({ block }) {
      drawing!.write(block);
      return { result: null };
    },
    check: ({ block }) => ({ result: drawing!.check(block) }),
    end() {
      drawing?.close();
      return { result: null };
    },
  };
}

class Drawing {
  private readonly file: number;
  private readonly columnsAtOnce: number;
  private readonly drawn: Float64Array;
  private readonly found: Float64Array;

  constructor(private readonly options: BeginDrawing) {
    const { parameters, path, mode } = options;
    const perColumn = parameters.outcomes * BLOCK * 8;
    this.columnsAtOnce = Math.max(1, Math.min(parameters.columns, Math.floor(MOST_BYTES / perColumn)));
    this.drawn = new Float64Array(this.columnsAtOnce * parameters.outcomes * BLOCK);
    this.found = new Float64Array(mode === 'check' ? this.drawn.length : 0);
    this.file = openSync(path, mode === 'check' ? 'r' : 'r+');
  }

  write(block: number): void {
    this.eachSegment(block, (values, at) => {
      const bytes = new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
      try {
        for (let done = 0; done < bytes.length; ) {
          done += writeSync(this.file, bytes, done, bytes.length - done, at + done);
        }
      } catch (cause) {
        throw cannotWrite(this.options.place, cause);
      }
    });
  }

  check(block: number): Mismatch | null {
    let mismatch: Mismatch | null = null;
    this.eachSegment(block, (values, at) => {
      mismatch ??= this.compare(values, at);
    });
    return mismatch;
  }

  close(): void {
    closeSync(this.file);
  }

  /** Draws a block, some columns at a time, and hands on each run of numbers that stands together in the file. */
  private eachSegment(block: number, take: (values: Float64Array, at: number) => void): void {
    const { parameters, seed, replicas, dataStart } = this.options;
    const { columns, outcomes } = parameters;
    const count = Math.min(BLOCK, replicas - block * BLOCK);
    for (let first = 0; first < columns; first += this.columnsAtOnce) {
      const end = Math.min(columns, first + this.columnsAtOnce);
      const length = (end - first) * outcomes;
      drawColumns(parameters, seed, block, count, first, end, this.drawn);
      const segments = end - first === columns ? 1 : count;
      for (let s = 0; s < segments; s++) {
        const size = segments === 1 ? count * length : length;
        const cell = ((block * BLOCK + s) * columns + first) * outcomes;
        take(this.drawn.subarray(s * length, s * length + size), dataStart + cell * 8);
      }
    }
  }

  private compare(values: Float64Array, at: number): Mismatch | null {
    const { parameters, dataStart, path } = this.options;
    const found = this.found.subarray(0, values.length);
    const bytes = new Uint8Array(found.buffer, found.byteOffset, found.byteLength);
    for (let done = 0; done < bytes.length; ) {
      const got = readSync(this.file, bytes, done, bytes.length - done, at + done);
      if (got === 0) throw new InputError(path, 'ends before its last replica', 'build the bundle again');
      done += got;
    }
    for (let i = 0; i < values.length; i++) {
      if (Object.is(found[i], values[i])) continue;
      const cell = (at - dataStart) / 8 + i;
      const perReplica = parameters.columns * parameters.outcomes;
      const inReplica = cell % perReplica;
      return {
        replica: Math.floor(cell / perReplica),
        column: Math.floor(inReplica / parameters.outcomes),
        outcome: inReplica % parameters.outcomes,
        found: found[i]!,
        expected: values[i]!,
      };
    }
    return null;
  }
}
