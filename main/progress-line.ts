import type { Progress } from './progress';

const BAR = 28;
/** Plain lines come no more often than this, so that a log stays readable. */
const SECONDS_BETWEEN_LINES = 5;
const SECONDS_BETWEEN_BARS = 0.1;

/** Shows progress on standard error: a bar on a terminal, plain lines elsewhere. */
export class ProgressLine {
  private stage = '';
  private started = 0;
  private shown = 0;

  constructor(
    private readonly out: NodeJS.WriteStream = process.stderr,
    private readonly now: () => number = () => performance.now() / 1000,
  ) {}

  show(progress: Progress): void {
    const now = this.now();
    if (progress.stage !== this.stage) {
      this.clear();
      this.stage = progress.stage;
      this.started = this.shown = now;
      return;
    }
    const last = progress.done >= progress.total;
    const wait = this.out.isTTY ? SECONDS_BETWEEN_BARS : SECONDS_BETWEEN_LINES;
    if (now - this.shown < wait && !(last && this.out.isTTY)) return;
    this.shown = now;
    const line = progressText(progress, now - this.started);
    this.out.write(this.out.isTTY ? `\r\u001b[K${barOf(progress)} ${line}` : `${line}\n`);
  }

  /** Takes the bar off a terminal. */
  clear(): void {
    if (this.out.isTTY && this.stage !== '') this.out.write('\r\u001b[K');
  }
}

/** `reading 62 %, 4 s left`. */
export function progressText({ stage, done, total, rows }: Progress, seconds: number): string {
  const share = total > 0 ? done / total : 0;
  const left = share > 0 ? `, ${Math.ceil((seconds * (1 - share)) / share)} s left` : '';
  const seen = rows ? `, ${rows.toLocaleString('en').replaceAll(',', '\u202f')} rows` : '';
  return `${stage} ${Math.round(share * 100)} %${seen}${left}`;
}

function barOf({ done, total }: Progress): string {
  const filled = total > 0 ? Math.round((BAR * done) / total) : 0;
  return `[${'='.repeat(filled)}${' '.repeat(BAR - filled)}]`;
}
