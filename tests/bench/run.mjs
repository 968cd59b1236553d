// `npm run bench`: Entasis against the script a practitioner writes today, in the same run on the same machine, as ratios.
// `npm run bench -- --large` adds the two figures that need time and disk: 50 M rows of Parquet, an ensemble of 8 GB.
import { execFileSync } from 'node:child_process';
import { existsSync, mkdtempSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { availableParallelism, tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { DuckDBInstance } from '@duckdb/node-api';
import { kernelSeconds } from './kernel.mjs';
import { writeEvents } from './make-events.mjs';
import { readingSeconds } from './reading.mjs';
import { inTurn, wholeProcess } from './whole-process.mjs';

const LARGE = process.argv.includes('--large');
const RUNS = 5;
const ROWS = 4_000_000;
const ENTASIS = fileURLToPath(new URL('../../out/main/command.js', import.meta.url));
const PEER = fileURLToPath(new URL('./peer.py', import.meta.url));
const PYTHON = '/usr/bin/python3';
const BINS = 100;
const EDGES = Array.from({ length: BINS + 1 }, (_, i) => Number((2 * i + 0.011 * i * i).toFixed(3)));

const folder = mkdtempSync(join(tmpdir(), 'entasis-bench-'));
const at = (name) => join(folder, name);
process.on('exit', () => rmSync(folder, { recursive: true, force: true }));

function writeStudy(name, files, replicas, cuts = []) {
  const axis = { label: 'Energy', unit: 'MeV', edges: EDGES };
  const study = {
    schema: 'entasis.study/1',
    events: { files },
    roles: { true: 't', reconstructed: 'r' },
    cuts,
    axes: { true: axis, reconstructed: axis },
    ensemble: { replicas, seed: 1 },
  };
  writeFileSync(at(name), JSON.stringify(study));
  return at(name);
}

const entasis = (...args) => ({ command: process.execPath, args: [ENTASIS, ...args] });
const python = (...args) => ({ command: PYTHON, args: [PEER, ...args] });
const number = (x, digits = 2) => x.toFixed(digits);
const rows = [];
function report(what, ours, theirs, ratio, note = '') {
  rows.push([what, ours, theirs, ratio, note]);
  console.log(`${what}: ours ${ours}, peer ${theirs}, ratio ${ratio}${note ? ` (${note})` : ''}`);
}

function havePeer() {
  if (!existsSync(PYTHON)) return false;
  try {
    execFileSync(PYTHON, ['-c', 'import numpy, pandas'], { stdio: 'ignore' });
    return true;
  } catch {
    return false;
  }
}

async function duckdb(sql) {
  const instance = await DuckDBInstance.create(':memory:');
  const connection = await instance.connect();
  await connection.run(sql);
  connection.closeSync();
  instance.closeSync();
}

async function csvTally(peer) {
  await writeEvents(at('events.csv'), ROWS);
  writeFileSync(at('edges.json'), JSON.stringify({ true: EDGES, reconstructed: EDGES }));
  const study = writeStudy('events.study.json', ['events.csv'], 1942, [{ column: 'quality', is: '>=', value: 1 }]);
  const ours = entasis('tally', study, '--out', at('events.part'));
  const theirs = peer
    ? python('tally', at('events.csv'), at('edges.json'), at('counts.npy'))
    : {
        command: process.execPath,
        args: [fileURLToPath(new URL('./duckdb-peer.mjs', import.meta.url)), at('events.csv'), at('edges.json')],
      };
  const { ratio, ours: a, theirs: b, peak } = await inTurn(ours, theirs, RUNS);
  const size = number(statSync(at('events.csv')).size / 1e6, 0);
  report(
    `tally of a ${ROWS / 1e6} M-row CSV (${size} MB), whole process`,
    `${number(a)} s`,
    `${number(b)} s`,
    number(ratio),
    `peak ${number(peak.ours, 0)} MB, peer ${number(peak.theirs, 0)} MB`,
  );
  return study;
}

async function ensemble(study) {
  const part = await wholeProcess(process.execPath, [
    ENTASIS,
    'build',
    study,
    '--from',
    at('events.part'),
    '--out',
    at('events.bundle'),
  ]);
  report(
    'bundle of that tally with 20 M cells, its audit and tables, whole process',
    `${number(part.seconds)} s`,
    '-',
    '-',
    `peak ${number(part.peak, 0)} MB`,
  );
  const before = () => ['draws.npy', 'replicas.npy'].forEach((name) => rmSync(at(name), { force: true }));
  const ours = { ...entasis('draw', at('events.bundle'), '--out', at('draws.npy')), before };
  const theirs = { ...python('ensemble', at('counts.npy'), '1942', at('replicas.npy')), before };
  const { ratio, ours: a, theirs: b, peak } = await inTurn(ours, theirs, RUNS);
  report(
    'ensemble of 20 M cells to disk, whole process',
    `${number(a)} s`,
    `${number(b)} s`,
    number(ratio),
    `peak ${number(peak.ours, 0)} MB, peer ${number(peak.theirs, 0)} MB`,
  );
}

async function kernel() {
  const replicas = 1920;
  const cells = replicas * (BINS + 2) * (BINS + 3);
  const theirs = Number((await wholeProcess(PYTHON, [PEER, 'kernel', at('counts.npy'), String(replicas)])).output);
  for (const workers of [1, 2]) {
    const ours = await kernelSeconds(at('events.bundle'), replicas, workers);
    report(
      `sampling kernel, ${workers} worker${workers > 1 ? 's' : ''}`,
      `${number(cells / ours / 1e6, 0)} Mcell/s`,
      `${number(cells / theirs / 1e6, 0)} Mcell/s`,
      number(theirs / ours),
    );
  }
}

async function parquet(count) {
  const t = `200 * -ln(1 - 0.7 * (hash(range) % 1000003) / 1000003.0)`;
  const r = `case when range % 13 = 0 then null else ${t} * (0.96 + 0.08 * (hash(range + 7) % 1000003) / 1000003.0) end`;
  await duckdb(`copy (select ${t} as t, ${r} as r from range(${count})) to '${at('events.parquet')}' (format parquet)`);
  const study = writeStudy('parquet.study.json', ['events.parquet'], 10);
  const { command, args } = entasis('tally', study, '--out', at('parquet.part'), '--json');
  await wholeProcess(command, args);
  const { seconds, peak } = await wholeProcess(command, args);
  report(
    `tally of ${count / 1e6} M rows of Parquet, whole process`,
    `${number(seconds)} s = ${number(count / seconds / 1e6, 1)} Mrow/s`,
    '-',
    '-',
    `peak ${number(peak, 0)} MB`,
  );
  const needs = ['t', 'r'].map((column) => ({ column, as: 'number' }));
  const reading = await readingSeconds(at('events.parquet'), needs, 2);
  if (reading.rows !== count) throw new Error(`${reading.rows} rows were read, not ${count}`);
  report(
    `reading ${count / 1e6} M rows of Parquet, 2 workers, no tally and no hash`,
    `${number(reading.seconds)} s = ${number(count / reading.seconds / 1e6, 1)} Mrow/s`,
    '-',
    '-',
  );
}

async function largeEnsemble() {
  const replicas = Math.ceil(8e9 / 8 / ((BINS + 2) * (BINS + 3)));
  const { command, args } = entasis(
    'draw',
    at('events.bundle'),
    '--replicas',
    String(replicas),
    '--out',
    at('large.npy'),
  );
  const { seconds, peak } = await wholeProcess(command, args);
  report(
    'ensemble of 8 GB, whole process',
    `${number(seconds, 1)} s = ${number(8000 / seconds, 0)} MB/s`,
    '-',
    '-',
    `peak ${number(peak, 0)} MB`,
  );
}

console.log(`${availableParallelism()} processors, Node ${process.version}`);
const peer = havePeer();
if (!peer) console.log('no pandas and numpy at /usr/bin/python3: DuckDB is the peer of the tally, sampling has none');
const study = await csvTally(peer);
if (peer) {
  await ensemble(study);
  await kernel();
}
await parquet(LARGE ? 50_000_000 : 10_000_000);
if (LARGE && peer) await largeEnsemble();
console.table(rows.map(([what, ours, theirs, ratio, note]) => ({ what, ours, peer: theirs, ratio, note })));
