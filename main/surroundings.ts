/** What every command is given: where its workers are, and the signal of Ctrl-C. */
export interface Surroundings {
  readWorker: URL;
  drawWorker: URL;
  version: string;
  signal: AbortSignal;
}
