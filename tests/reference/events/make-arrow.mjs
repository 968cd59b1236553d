// Makes lz4.feather: Apache's own library writes the container, the reference program (lz4 1.9.4) compresses its buffers as
// Arrow's writers do: node tests/reference/events/make-arrow.mjs
import { execFileSync } from 'node:child_process';
import { writeFileSync } from 'node:fs';
import {
  CompressionType,
  compressionRegistry,
  RecordBatchFileWriter,
  tableFromArrays,
  vectorFromArray,
  Utf8,
} from 'apache-arrow';

const ROWS = 20_000;
compressionRegistry.set(CompressionType.LZ4_FRAME, {
  encode: (data) => execFileSync('lz4', ['-q', '-c', '--no-frame-crc'], { input: data, maxBuffer: 1 << 30 }),
});
const table = tableFromArrays({
  e_tag: Float64Array.from({ length: ROWS }, (_, i) => i / 4),
  quality: Int32Array.from({ length: ROWS }, (_, i) => i % 3),
  run: vectorFromArray(
    Array.from({ length: ROWS }, (_, i) => `run ${i % 7}`),
    new Utf8(),
  ),
});
const writer = RecordBatchFileWriter.writeAll(table, { compressionType: CompressionType.LZ4_FRAME });
writeFileSync(new URL('lz4.feather', import.meta.url), writer.toUint8Array(true));
