import { formatCount, formatNumber } from '../src/audit/wording';
import { InputError } from '../src/study/input-error';
import { MOST_REPLICAS, type Study } from '../src/study/study';
import type { Tally } from '../src/tally/tally';
import { MatrixThread } from './session/matrix-thread';
import type { Progress } from './progress';

export interface EnsembleSizeOptions {
  study: Study;
  tally: Tally;
  /** Text of the study's reference table, where it has one. */
  referenceTable: string | null;
  /** Significant digits of every folded uncertainty. */
  digits: number;
  matrixWorker: URL;
  signal?: AbortSignal | undefined;
  onProgress?: ((progress: Progress) => void) | undefined;
}

/** Bytes of an ensemble that is written without its size having been stated: beyond, the study has to say so itself. */
export const MOST_BYTES_UNASKED = 8e9;

/**
 * The study with as many replicas as so many digits need (JCGM 101:2008, 7.9), found on the ensemble's own replicas in a
 * worker, and how that was found. Throws `InputError` where that is more than an ensemble may have or than is written unasked.
 */
export async function sizedEnsemble(options: EnsembleSizeOptions): Promise<{ study: Study; note: string }> {
  const { study, tally, referenceTable, digits, matrixWorker, signal, onProgress } = options;
  const thread = new MatrixThread(matrixWorker);
  try {
    const onNote = (note: unknown): void =>
      onProgress?.({ stage: 'drawing', unit: 'steps', ...(note as { done: number; total: number }) });
    const job = { ...(signal && { signal }), onNote };
    const { replicas, note } = await thread.ask(
      { key: 'build', tally },
      'replicasNeeded',
      { study, referenceTable, digits },
      job,
    );
    checkSize(digits, replicas, tally.columnNames.length * tally.outcomeNames.length);
    return { study: { ...study, ensemble: { ...study.ensemble, replicas } }, note };
  } finally {
    await thread.end();
  }
}

/** Throws `InputError` for an ensemble of `replicas` of so many `cells` that is not written unasked. */
export function checkSize(digits: number, replicas: number, cells: number): void {
  const bytes = replicas * cells * 8;
  if (bytes <= MOST_BYTES_UNASKED && replicas <= MOST_REPLICAS) return;
  const size = `${formatCount(replicas)} replicas, ${formatNumber(bytes / 1e9)} GB`;
  const most =
    replicas > MOST_REPLICAS
      ? `more than the ${formatCount(MOST_REPLICAS)} of an ensemble`
      : `more than the ${formatNumber(MOST_BYTES_UNASKED / 1e9)} GB that are written unasked`;
  throw new InputError(
    `--digits ${digits}`,
    `needs about ${size}, ${most}`,
    'ask for fewer digits, or state ensemble.replicas in the study',
  );
}
