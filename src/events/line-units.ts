import { setImmediate as turn } from 'node:timers/promises';
import { stopIfCancelled } from '../study/input-error';
import type { Batch, Unit } from './batch';
import type { BatchBuilder } from './batch-builder';
import { sizeOf } from './byte-source';
import { LineBlocks, lineStart } from './lines';
import { openBytes, type Compression } from './open-bytes';

/** A smaller piece of a plain file is not worth a worker of its own. */
export const LEAST_PIECE = 4_194_304;

/** Turns lines into the rows of a batch. */
export interface LineParser {
  /** Physical lines passed. */
  readonly place: number;
  /** Where the lines must stand, if it matters: of length `ROOM`. */
  readonly room?: Buffer | undefined;
  /** Parses whole lines of `bytes[from, to)` until the builder is full; where it stopped. */
  parse(bytes: Uint8Array, from: number, to: number): number;
  /** Gives back what it works with, batches included. */
  close?(): void;
}

/** Cuts a plain text file into at most `pieces` byte ranges of about the same size; a compressed one is one. */
export function lineUnits(
  file: Pick<Unit, 'path' | 'name' | 'format' | 'detail'>,
  compression: Compression,
  pieces: number,
): Unit[] {
  const size = sizeOf(file.path, file.name);
  const count = compression === 'none' ? Math.max(1, Math.min(pieces, Math.floor(size / LEAST_PIECE))) : 1;
  const edge = (i: number) => Math.floor((size * i) / count);
  return Array.from({ length: count }, (_, i) => ({ ...file, start: edge(i), end: edge(i + 1) }));
}

/**
 * Reads the lines that begin in a unit's range and hands on what the parser makes of them. Ends with a batch, be it
 * empty, that tells all places passed.
 */
export async function* readLines(
  unit: Unit,
  compression: Compression,
  parser: LineParser,
  builder: BatchBuilder,
  signal?: AbortSignal,
): AsyncGenerator<Batch> {
  const source = openBytes(unit.path, unit.name, compression, ...wholeLines(unit));
  let told = 0;
  const take = (): Batch => {
    const bytes = source.consumed - told;
    told = source.consumed;
    return builder.take(bytes, parser.place);
  };
  try {
    const blocks = new LineBlocks(source, unit.name, parser.room);
    for (let block = await blocks.next(); block !== null; block = await blocks.next()) {
      for (let at = 0; at < block.to;) {
        at = parser.parse(block.bytes, at, block.to);
        if (!builder.full) continue;
        stopIfCancelled(signal);
        yield take();
        // A signal arrives as a message: the event loop must turn for it.
        await turn();
      }
    }
    stopIfCancelled(signal);
    yield take();
  } finally {
    source.close();
    parser.close?.();
  }
}

/** The bytes of the lines that begin in the unit's range. */
function wholeLines({ path, name, start, end }: Unit): [number, number] {
  const size = sizeOf(path, name);
  return [lineStart(path, name, start, size), end >= size ? size : lineStart(path, name, end, size)];
}
