import { BLOCK, drawBlock } from '../../../src/ensemble/draw';
import { simultaneousBand } from '../../../src/posterior/bands';
import type { Posterior } from '../../../src/posterior/posterior';
import type { ColumnView } from '../../bridge';
import { checkPlace } from './cell-view';
import type { Analysis } from '../analysis';

/** Replicas behind a band at 95 %: its half-width is then known to about 2 % (50 replicas lie beyond it). */
const REPLICAS = 1024;

/** One column: its simultaneous band, its halves and its runs. Throws `InputError` where it has no posterior. */
export function columnView(analysis: Analysis, column: number): ColumnView {
  checkPlace(analysis, column);
  const { posterior, tally, study } = analysis;
  const { outcomes } = posterior;
  const part = (values: Float64Array): Float64Array => values.subarray(column * outcomes, (column + 1) * outcomes);
  const { mean, sd } = analysis.summary();
  const replicas = drawColumn(analysis, column);
  const { lower, upper } = simultaneousBand(
    replicas,
    part(mean),
    part(sd),
    part(tally.cells.events),
    study.credibility,
  );
  const half = (h: number): Float64Array =>
    tally.halves.events.slice((2 * column + h) * outcomes, (2 * column + h + 1) * outcomes);
  const inBin = analysis.trueAxis.kind === 'numeric' && column > 0 && column < posterior.columns - 1;
  return {
    column,
    band: { lower, upper, replicas: REPLICAS },
    halves: inBin ? { lower: half(0), upper: half(1) } : null,
    runs: tally.runs && { labels: tally.runs.labels, events: runsOf(tally.runs.cells.events, posterior, column) },
  };
}

/** The column in the first replicas of the study's ensemble, `[replicas, outcomes]`. */
function drawColumn({ posterior, study, ensemble }: Analysis, column: number): Float64Array {
  const { outcomes } = posterior;
  const replicas = new Float64Array(REPLICAS * outcomes);
  for (let block = 0; block < REPLICAS / BLOCK; block++) {
    const out = replicas.subarray(block * BLOCK * outcomes, (block + 1) * BLOCK * outcomes);
    drawBlock(ensemble(), study.ensemble.seed, block, BLOCK, out, column, column + 1);
  }
  return replicas;
}

function runsOf(events: Float64Array, { columns, outcomes }: Posterior, column: number): Float64Array {
  const runs = events.length / (columns * outcomes);
  const out = new Float64Array(runs * outcomes);
  for (let r = 0; r < runs; r++) {
    const from = (r * columns + column) * outcomes;
    out.set(events.subarray(from, from + outcomes), r * outcomes);
  }
  return out;
}
