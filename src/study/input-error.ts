/**
 * Bad input, told in one line: where it stands (file, `file:line`, or JSON path), what is wrong, what to do about it.
 * Every fault a user can cause ends as one of these; the command line prints it as `entasis: WHERE: WHAT: WHAT TO DO`.
 */
export class InputError extends Error {
  override readonly name = 'InputError';

  constructor(
    readonly where: string,
    readonly what: string,
    readonly remedy: string,
    options?: ErrorOptions,
  ) {
    super([where, what, remedy].map(oneLine).join(': '), options);
  }
}

/** The work was stopped by the user: no fault, nothing half-written. */
export class Cancelled extends Error {
  override readonly name = 'Cancelled';
  constructor() {
    super('cancelled');
  }
}

/** Throws `Cancelled` once the signal is aborted: called between batches and blocks. */
export function stopIfCancelled(signal: AbortSignal | undefined): void {
  if (signal?.aborted) throw new Cancelled();
}

/** A user's text made safe to print on one line: control characters become spaces, long text is shortened. */
export function oneLine(text: string): string {
  // eslint-disable-next-line no-control-regex
  const flat = text.replace(/[\u0000-\u001f\u007f]+/g, ' ').trim();
  const LONGEST = 400;
  return flat.length > LONGEST ? `${flat.slice(0, LONGEST)}...` : flat;
}
