/** How far a job is: for a bar, a line, or the window. */
export interface Progress {
  stage: 'reading' | 'drawing' | 'checking' | 'writing' | 'rehearsing';
  done: number;
  total: number;
  unit: 'bytes' | 'replicas' | 'steps';
  /** Rows read so far, where rows are read. */
  rows?: number;
}
