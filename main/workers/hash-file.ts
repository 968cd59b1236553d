import { createHash } from 'node:crypto';
import { createReadStream } from 'node:fs';

const BLOCK = 1 << 20;

/** SHA-256 of a file, streamed. */
export async function hashFile(path: string): Promise<string> {
  const hash = createHash('sha256');
  for await (const block of createReadStream(path, { highWaterMark: BLOCK })) hash.update(block as Buffer);
  return hash.digest('hex');
}
