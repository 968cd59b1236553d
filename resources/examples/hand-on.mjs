// Opens a bundle that Entasis has written, checks its ensemble against its summary, and hands it on in another format.
//
//     node resources/examples/hand-on.mjs BUNDLE OUT.npz
//
// Prints the largest pull of a cell: how far the mean of the replicas lies from the posterior mean, in standard errors.
// Replicas are read in blocks, so that an ensemble of any size fits.
import { formatOf, openBundle, readArray, replicaBlocks } from 'entasis';

const [folder, out] = process.argv.slice(2);
const bundle = openBundle(folder);
const mean = readArray(bundle, 'posterior/mean').values;
const sd = readArray(bundle, 'posterior/sd').values;
const cells = bundle.columns.length * bundle.outcomes.length;

const sums = new Float64Array(cells);
for (const { count, values } of replicaBlocks(bundle)) {
  for (let i = 0; i < count * cells; i++) sums[i % cells] += values[i];
}
let worst = { pull: 0, cell: 0 };
sums.forEach((sum, cell) => {
  const pull = sd[cell] > 0 ? (sum / bundle.replicas - mean[cell]) / (sd[cell] / Math.sqrt(bundle.replicas)) : 0;
  if (Math.abs(pull) > Math.abs(worst.pull)) worst = { pull, cell };
});
const column = bundle.columns[Math.floor(worst.cell / bundle.outcomes.length)];
const outcome = bundle.outcomes[worst.cell % bundle.outcomes.length];
console.log(`${bundle.manifest.title}: ${bundle.replicas} replicas of ${cells} cells`);
console.log(`largest pull ${worst.pull.toFixed(2)} at column ${column}, outcome ${outcome}`);

for (const { path, bytes, sha256 } of await formatOf('npz').write(bundle, { out })) {
  console.log(`${path}: ${bytes} bytes, SHA-256 ${sha256}`);
}
