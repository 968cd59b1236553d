/** The four bytes from `at` on as a signed 32-bit integer, the lowest first. */
export function wordAt(bytes: Uint8Array, at: number): number {
  return bytes[at] | (bytes[at + 1] << 8) | (bytes[at + 2] << 16) | (bytes[at + 3] << 24);
}

/** A 32-bit integer with its bits turned left. */
export function rotated(x: number, by: number): number {
  return (x << by) | (x >>> (32 - by));
}
