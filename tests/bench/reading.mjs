import { isMainThread, parentPort, Worker, workerData } from 'node:worker_threads';
import { readerFor } from '../../out/main/library.js';

const UNITS_PER_WORKER = 8;

/** Seconds in which `workers` workers, started already, read the needed columns of a file; nothing is tallied or hashed. */
export async function readingSeconds(path, needs, workers) {
  const reader = await readerFor(path);
  const units = await reader.plan(path, path, needs, workers * UNITS_PER_WORKER);
  const lanes = Array.from({ length: workers }, (_, w) => {
    const own = units.filter((_unit, u) => u % workers === w);
    return new Worker(new URL(import.meta.url), { workerData: { path, needs, units: own } });
  });
  await Promise.all(lanes.map(nextMessage));
  const started = performance.now();
  const rows = lanes.map(nextMessage);
  lanes.forEach((lane) => lane.postMessage('read'));
  const total = (await Promise.all(rows)).reduce((sum, count) => sum + count, 0);
  const seconds = (performance.now() - started) / 1000;
  await Promise.all(lanes.map((lane) => lane.terminate()));
  return { seconds, rows: total };
}

function nextMessage(port) {
  return new Promise((resolve, reject) => {
    port.once('message', resolve);
    port.once('error', reject);
  });
}

async function readUnits({ path, needs, units }) {
  const reader = await readerFor(path);
  let rows = 0;
  const lane = async () => {
    for (let unit = units.shift(); unit !== undefined; unit = units.shift()) {
      for await (const batch of reader.read(unit, needs)) rows += batch.rows;
    }
  };
  await Promise.all(Array.from({ length: reader.atOnce ?? 1 }, lane));
  return rows;
}

if (!isMainThread && workerData?.units) {
  parentPort.postMessage('ready');
  await nextMessage(parentPort);
  parentPort.postMessage(await readUnits(workerData));
}
