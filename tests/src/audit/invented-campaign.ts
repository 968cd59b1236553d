import type { Cells, Tally } from '../../../src/tally/tally';
import { emptyLedger } from '../../../src/tally/ledger';

/** What a test states of a tally; the rest is filled in so that totals, halves and runs agree. */
export interface CampaignCells {
  columnNames: string[];
  outcomeNames: string[];
  /** `[columns][outcomes]` events. */
  events: number[][];
  weights?: number[][];
  squares?: number[][];
  /** `[columns][2][outcomes]` events; by default everything stands in the first half. */
  halves?: number[][][];
  halvesWeights?: number[][][];
  halvesSquares?: number[][][];
  /** `[runs][columns][outcomes]` events. */
  runs?: number[][][];
  runWeights?: number[][][];
  runSquares?: number[][][];
  trueRange?: { least: number; greatest: number } | null;
}

/** A tally made by hand. */
export function tallyOf(cells: CampaignCells): Tally {
  const flat = (values: number[][] | undefined): Float64Array | null =>
    values ? Float64Array.from(values.flat()) : null;
  const flat3 = (values: number[][][] | undefined): Float64Array | null => flat(values?.map((inner) => inner.flat()));
  const inFirstHalf = (values: number[][] | undefined): number[][][] | undefined =>
    values?.map((row) => [row, row.map(() => 0)]);
  const weighted = cells.weights !== undefined;
  const squares = flat(cells.squares);
  const halves: Cells = {
    events: flat3(cells.halves ?? inFirstHalf(cells.events))!,
    weights: flat3(cells.halvesWeights ?? inFirstHalf(cells.weights)),
    squares: flat3(cells.halvesSquares ?? inFirstHalf(cells.squares)),
  };
  const runs = cells.runs && {
    labels: cells.runs.map((_, r) => `run ${r + 1}`),
    cells: { events: flat3(cells.runs)!, weights: flat3(cells.runWeights), squares: flat3(cells.runSquares) },
  };
  return {
    columnNames: cells.columnNames,
    outcomeNames: cells.outcomeNames,
    weighted,
    cells: { events: flat(cells.events)!, weights: flat(cells.weights), squares },
    halves,
    runs: runs ?? null,
    largestSquare: weighted ? new Float64Array(cells.columnNames.length) : null,
    unmatched: null,
    trueRange: cells.trueRange ?? null,
    ledger: emptyLedger(),
    duplicates: null,
  };
}

/** Names of the columns or outcomes of an axis with `bins` bins: `below`, `b1`.., `above`, and `lost` where asked. */
export function namesOf(bins: number, lost = false): string[] {
  const inside = Array.from({ length: bins }, (_, i) => `b${i + 1}`);
  return ['below', ...inside, 'above', ...(lost ? ['lost'] : [])];
}

/** `[columns][outcomes]` totals of `[columns][2][outcomes]` halves, or of anything with the places to sum in the middle. */
export function overHalves(halves: number[][][]): number[][] {
  return halves.map(([lower, upper]) => lower!.map((n, k) => n + upper![k]!));
}
