import type { Flag } from '../../src/audit/flag';
import type { Bench } from '../bench/bench.svelte';

/** Chooses a flag with the place it concerns, so that every picture shows it. */
export function chooseFlag(bench: Bench, flag: Flag): void {
  const tally = bench.results.matrix?.tally;
  const column = flag.column === null ? -1 : (tally?.columnNames.indexOf(flag.column) ?? -1);
  const outcome = flag.bin === null ? -1 : (tally?.outcomeNames.indexOf(flag.bin) ?? -1);
  bench.chosen.choose({
    kind: 'flag',
    id: flag.id,
    column: column < 0 ? null : column,
    outcome: outcome < 0 ? null : outcome,
  });
}
