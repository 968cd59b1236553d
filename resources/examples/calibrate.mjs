// From tagged events in memory to a response matrix with its uncertainty, with Entasis as a library.
//
//     node resources/examples/calibrate.mjs
//
// An invented campaign: a scintillating tile is calibrated with electrons of known momentum. Prints the efficiency of
// every momentum bin, what the audit flags, and a measured spectrum folded with 500 replicas: mean, and the sd that the
// statistics of this calibration leave in it.
import { analyse, drawReplicas, isAbsent, parseStudy, tallyTable } from 'entasis';

const study = parseStudy({
  schema: 'entasis.study/1',
  title: 'Tile with electrons, bench',
  events: { files: ['none, the events are in memory'] },
  roles: { true: 'momentum', reconstructed: 'charge' },
  lost: 'missing',
  axes: {
    true: { label: 'Momentum', unit: 'MeV', from: 10, to: 60, bins: 5 },
    reconstructed: { label: 'Charge', unit: 'pC', from: 0, to: 140, bins: 7 },
  },
  ensemble: { replicas: 500, seed: 4 },
});

const { tally } = tallyTable(study, simulatedEvents(4000));
const { summary, posterior, audit } = analyse(study, tally);

console.log(`${tally.ledger.tallied} events in ${tally.columnNames.length} columns`);
const { efficiency } = audit.measures.columns;
if (!isAbsent(efficiency)) {
  tally.columnNames.forEach((name, j) => {
    const [value, lower, upper] = [efficiency.value[j], efficiency.lower[j], efficiency.upper[j]].map((p) =>
      p.toFixed(3),
    );
    console.log(`efficiency ${name}: ${value} [${lower}, ${upper}]`);
  });
}
for (const { id, column, bin, evidence } of audit.flags.filter((flag) => flag.state === 'flagged')) {
  console.log(`flagged ${id} ${column ?? bin ?? ''}: ${evidence}`);
}

// 3000 particles in each bin, none outside.
const expected = tally.columnNames.map((name) => (name.startsWith('[') ? 3000 : 0));
const { mean, sd } = foldedWithEveryReplica(expected);
tally.outcomeNames.forEach((name, k) => {
  const central = expected.reduce((sum, s, j) => sum + s * summary.mean[j * summary.outcomes + k], 0);
  console.log(
    `folded ${name}: ${mean[k].toFixed(1)} +- ${sd[k].toFixed(1)} (by the mean matrix ${central.toFixed(1)})`,
  );
});

function foldedWithEveryReplica(spectrum) {
  const { outcomes } = posterior;
  const sums = new Float64Array(outcomes);
  const squares = new Float64Array(outcomes);
  const { replicas, seed } = study.ensemble;
  for (const { count, values } of drawReplicas(posterior, seed, 0, replicas)) {
    for (let r = 0; r < count; r++) {
      for (let k = 0; k < outcomes; k++) {
        const folded = spectrum.reduce((sum, s, j) => sum + s * values[(r * spectrum.length + j) * outcomes + k], 0);
        sums[k] += folded;
        squares[k] += folded ** 2;
      }
    }
  }
  const means = sums.map((sum) => sum / replicas);
  return { mean: means, sd: squares.map((sum, k) => Math.sqrt((sum - replicas * means[k] ** 2) / (replicas - 1))) };
}

/** Charge is twice the momentum, smeared by 12 %; slow electrons stop in the wrapping. Evenly spread, no dice. */
function simulatedEvents(count) {
  const momentum = new Float64Array(count);
  const charge = new Float64Array(count);
  // The golden ratio and the square root of two fill the square evenly (Weyl 1916).
  const part = (i, step) => (i * step) % 1;
  for (let i = 0; i < count; i++) {
    momentum[i] = 5 + 60 * part(i + 1, (Math.sqrt(5) - 1) / 2);
    const seen = part(i + 1, Math.SQRT2) > Math.exp(-momentum[i] / 15);
    // The sum of three uniform numbers is near enough to a bell for an example.
    const bell = part(i + 1, Math.sqrt(3)) + part(i + 1, Math.sqrt(7)) + part(i + 1, Math.sqrt(11)) - 1.5;
    charge[i] = seen ? 2 * momentum[i] * (1 + 0.24 * bell) : NaN;
  }
  return { momentum, charge };
}
