import { readFileSync } from 'node:fs';
import { Worker } from 'node:worker_threads';

const BLOCK = 32;

/** Best of three: seconds that `workers` draw workers take for `replicas` replicas of a bundle's posterior, no disk. */
export async function kernelSeconds(bundle, replicas, workers) {
  const { columns, outcomes } = JSON.parse(readFileSync(`${bundle}/manifest.json`, 'utf8'));
  const bytes = readFileSync(`${bundle}/posterior/shape.npy`);
  const length = columns.length * outcomes.length;
  const shape = new Float64Array(length);
  new Uint8Array(shape.buffer).set(bytes.subarray(bytes.length - length * 8));
  const parameters = { columns: columns.length, outcomes: outcomes.length, shape, scale: null };
  const begin = { parameters, seed: 1, replicas };
  const lanes = Array.from(
    { length: workers },
    () => new Worker(new URL('../../out/main/draw-worker.js', import.meta.url)),
  );
  await Promise.all(lanes.map((lane) => call(lane, 'begin', begin)));
  const rooms = lanes.map(() => new SharedArrayBuffer(BLOCK * length * 8));
  let best = Infinity;
  for (let round = 0; round < 4; round++) {
    const started = performance.now();
    let next = 0;
    const run = async (lane, i) => {
      while (next < replicas / BLOCK) await call(lane, 'draw', { block: next++, into: rooms[i] });
    };
    await Promise.all(lanes.map(run));
    // The first round warms the compiler.
    if (round > 0) best = Math.min(best, (performance.now() - started) / 1000);
  }
  await Promise.all(lanes.map((lane) => lane.terminate()));
  return best;
}

let id = 0;
function call(worker, name, argument) {
  return new Promise((resolve, reject) => {
    worker.once('message', ({ fault }) => (fault ? reject(new Error(fault.what)) : resolve()));
    worker.postMessage({ id: id++, name, argument });
  });
}
