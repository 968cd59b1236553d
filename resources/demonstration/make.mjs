// Makes the demonstration campaign, an invented one: a scintillator wall in a gallery is calibrated with neutrons
// whose energy a time-of-flight tag tells. Seeded: the same rows every time. `node resources/demonstration/make.mjs`.
//
// What is built in, so that the audit has something to find:
// - a threshold that loses slow neutrons, and a window that faint ones leave below and bright ones above;
// - neutrons slower than the true axis begins (feed-in), a notch in the beam with none at all, and few above 50 MeV;
// - weights of the beam monitor, some of them negative (background subtracted), one of them absurd;
// - run 6 with a gain 3 % too high; a readout that wrote twelve events twice; and rows that no reader should take.
import { writeFileSync } from 'node:fs';
import { gzipSync } from 'node:zlib';

const SEED = 20261201;
const RUNS = 6;
const EVENTS_PER_RUN = 9000;

/** A small published generator (sfc32, from the PractRand suite of Chris Doty-Humphrey), enough for a demonstration. */
function uniforms(seed) {
  let [a, b, c, d] = [seed | 0, 0x9e3779b9 | 0, 0x85ebca6b | 0, 1];
  const next = () => {
    const t = (((a + b) | 0) + d) | 0;
    d = (d + 1) | 0;
    a = b ^ (b >>> 9);
    b = (c + (c << 3)) | 0;
    c = ((c << 21) | (c >>> 11)) + t;
    return (t >>> 0) / 2 ** 32;
  };
  for (let i = 0; i < 16; i++) next();
  return next;
}

const uniform = uniforms(SEED);
const normal = () => Math.sqrt(-2 * Math.log(1 - uniform())) * Math.cos(2 * Math.PI * uniform());

/** True energy, MeV: a falling spectrum from 0.8 MeV with a notch at 40 to 42 MeV, thin above 50 MeV. */
function trueEnergy() {
  for (;;) {
    const energy = uniform() < 0.997 ? 0.8 - 13 * Math.log(1 - uniform()) : 44 + 18 * uniform();
    const inNotch = energy >= 40 && energy < 42;
    const rare = energy >= 50 && uniform() < 0.8;
    if (!inNotch && !rare && energy < 64) return energy;
  }
}

/** Chance that the wall answers at all: a threshold at about 3.2 MeV, and 92 % far above it. */
const answers = (energy) => uniform() < 0.92 / (1 + Math.exp(-(energy - 3.2) / 0.9));

/** Measured energy, MeV: light output a little below the true energy, smeared, with a tail of escaping neutrons. */
function measuredEnergy(energy, gain) {
  const escaped = uniform() < 0.12 ? energy * 0.5 * uniform() : 0;
  const width = Math.sqrt(0.35 ** 2 + 0.22 ** 2 * energy + (0.03 * energy) ** 2);
  return Math.max(0, gain * (0.97 * energy - escaped) + width * normal());
}

function weightOf(energy) {
  if (energy > 46 && energy < 50 && uniform() < 0.2) return -1.1;
  return 0.75 + 0.5 * uniform();
}

function makeRun(run) {
  const gain = run === RUNS ? 1.03 : 1;
  const rows = [];
  for (let i = 0; i < EVENTS_PER_RUN; i++) {
    const energy = trueEnergy();
    const measured = answers(energy) ? measuredEnergy(energy, gain).toFixed(3) : '';
    const quality = uniform() < 0.02 ? 1 : uniform() < 0.5 ? 2 : 3;
    const weight = run === 3 && i === 4321 ? 60 : weightOf(energy);
    const tagged = run === 3 && i === 4321 ? 57.1 : energy;
    rows.push([run, run * 100_000 + i, tagged.toFixed(3), measured, weight.toFixed(3), quality].join(','));
  }
  return rows;
}

/** Rows as a logger leaves them when something goes wrong, each for another reason. */
const BAD_ROWS = [
  '2,209001,12.5,overflow,1.002,3',
  '2,209002,8.25,7.913',
  '2,209003,"14.2,13.9,0.981,2',
  '2,209004,,11.870,1.013,3',
  '2,209005,17.1,16.402,,2',
  '2,209006,21.9,inf,0.954,3',
  '2,209007,9.1,8.7,1.0,3,17',
];

for (let run = 1; run <= RUNS; run++) {
  const rows = makeRun(run);
  if (run === 2) BAD_ROWS.forEach((row, i) => rows.splice(1000 * (i + 1), 0, row));
  if (run === 5) rows.push(...rows.slice(500, 512));
  const text = ['run,event_id,e_tof_MeV,e_wall_MeV,weight,quality', ...rows, ''].join('\n');
  const path = new URL(`runs/run-${run}.csv.gz`, import.meta.url);
  writeFileSync(path, gzipSync(text, { level: 9 }));
}
