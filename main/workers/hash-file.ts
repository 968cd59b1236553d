import { createHash } from 'node:crypto';
import { setImmediate as turn } from 'node:timers/promises';
import { PlainBytes } from '../../src/events/byte-source';

const BLOCK = 1 << 18;

/** SHA-256 of a file, block by block: memory is bounded, and the event loop turns between blocks. */
export async function hashFile(path: string): Promise<string> {
  const hash = createHash('sha256');
  const block = Buffer.allocUnsafe(BLOCK);
  const source = new PlainBytes(path, path);
  try {
    for (let got = source.fill(block); got > 0; got = source.fill(block)) {
      hash.update(block.subarray(0, got));
      await turn();
    }
  } finally {
    source.close();
  }
  return hash.digest('hex');
}
