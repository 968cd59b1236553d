import { Cancelled, InputError, oneLine } from '../../src/study/input-error';
import type { Refusal, RefusalCode } from '../bridge';

/** A call that the bridge does not do, and why: no fault of the engine. */
export class Refused extends Error {
  override readonly name = 'Refused';
  constructor(
    readonly code: RefusalCode,
    readonly where: string,
    readonly what: string,
    readonly remedy: string,
  ) {
    super(`${where}: ${what}: ${remedy}`);
  }
}

/** Any error as plain data that crosses the bridge. Only a defect of the program is a `fault`. */
export function refusalOf(error: unknown): Refusal {
  if (error instanceof Refused) return refusal(error.code, error.where, error.what, error.remedy);
  if (error instanceof InputError) return refusal('input', error.where, error.what, error.remedy);
  if (error instanceof Cancelled) return refusal('cancelled', 'job', 'cancelled', 'start it again if it is wanted');
  const system = error as NodeJS.ErrnoException;
  if (system.code !== undefined && system.path !== undefined) {
    return refusal('input', system.path, systemFault(system.code), 'choose another place, or ask who looks after it');
  }
  return refusal(
    'fault',
    'program',
    system.message ?? String(error),
    'please report this with what was done before it',
  );
}

function refusal(code: RefusalCode, where: string, what: string, remedy: string): Refusal {
  return { ok: false, code, where: oneLine(where), what: oneLine(what), remedy: oneLine(remedy) };
}

/** The system's commonest refusals in words. */
const SYSTEM_FAULTS: Record<string, string> = {
  EACCES: 'not permitted',
  EPERM: 'not permitted',
  ENOENT: 'not there',
  ENOTDIR: 'not a folder',
  EISDIR: 'a folder, not a file',
  ENOSPC: 'no space left there',
  EROFS: 'cannot be written to',
  EMFILE: 'too many open files',
};

function systemFault(code: string): string {
  return SYSTEM_FAULTS[code] ?? `the system says ${code}`;
}
