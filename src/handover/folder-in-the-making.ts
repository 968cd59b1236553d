import { createHash, type Hash } from 'node:crypto';
import {
  closeSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  openSync,
  readdirSync,
  renameSync,
  rmSync,
  statSync,
  writeSync,
} from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { InputError } from '../study/input-error';
import { npyBytes, npyHeader, type NpyType } from './npy';
import type { BundleArray, Manifest } from './manifest';

/**
 * A folder in the making: it stands beside its place under another name, and takes it only when whole. Until then the
 * old folder, or none, is there.
 */
export class FolderInTheMaking {
  readonly path: string;
  readonly files: Manifest['files'] = {};
  readonly arrays: Record<string, BundleArray> = {};

  /** Throws `InputError` where the place cannot be written, or holds something that is not such a folder. */
  constructor(
    private readonly place: string,
    marker: string,
  ) {
    const parent = dirname(resolve(place));
    if (existsSync(place) && !isReplaceable(place, marker)) {
      throw new InputError(place, 'is there and was not written by this command', 'choose another place or remove it');
    }
    try {
      mkdirSync(parent, { recursive: true });
      this.path = mkdtempSync(join(parent, `.${basename(resolve(place))}.partial-`));
    } catch (cause) {
      throw cannotWrite(place, cause);
    }
  }

  /** Writes one file and records its size and hash. */
  write(name: string, bytes: string | Uint8Array): void {
    const data = typeof bytes === 'string' ? Buffer.from(bytes, 'utf8') : bytes;
    this.stream(name, (put) => put(data));
  }

  /** Writes one file piece by piece. */
  stream(name: string, fill: (put: (piece: Uint8Array) => void) => void): void {
    const hash = createHash('sha256');
    const path = this.pathOf(name);
    let bytes = 0;
    try {
      const file = openSync(path, 'w');
      try {
        fill((piece) => {
          hash.update(piece);
          bytes += piece.length;
          writeWhole(file, piece);
        });
      } finally {
        closeSync(file);
      }
    } catch (cause) {
      throw cause instanceof InputError ? cause : cannotWrite(this.place, cause);
    }
    this.record(name, bytes, hash);
  }

  /** Writes an array as NPY and records its layout. */
  array(name: string, type: NpyType, shape: number[], values: Float64Array, axes: string[], holds: string): void {
    this.stream(name, (put) => {
      put(npyHeader(type, shape));
      put(npyBytes(type, values));
    });
    this.arrays[name] = { type, shape, axes, holds };
  }

  /** Where a file of the folder stands now; its sub-folder is made. */
  pathOf(name: string): string {
    const path = join(this.path, name);
    mkdirSync(dirname(path), { recursive: true });
    return path;
  }

  /** Records a file that something else wrote. */
  record(name: string, bytes: number, hash: Hash | string): void {
    this.files[name] = { bytes, sha256: typeof hash === 'string' ? hash : hash.digest('hex') };
  }

  /** Takes the place: an old folder there gives way only now. */
  finish(): void {
    try {
      const old = `${this.path}.old`;
      const replaced = existsSync(this.place);
      if (replaced) renameSync(this.place, old);
      renameSync(this.path, this.place);
      if (replaced) rmSync(old, { recursive: true, force: true });
    } catch (cause) {
      throw cannotWrite(this.place, cause);
    }
  }

  /** Removes what was written. */
  abandon(): void {
    rmSync(this.path, { recursive: true, force: true });
  }
}

/** A folder is replaced only where it is one of the same kind (or empty): nobody's other files are lost. */
function isReplaceable(place: string, marker: string): boolean {
  if (!statSync(place).isDirectory()) return false;
  return existsSync(join(place, marker)) || readdirSync(place).length === 0;
}

/** Writes all of a piece: one call may write less. */
export function writeWhole(file: number, piece: Uint8Array): void {
  for (let at = 0; at < piece.length;) at += writeSync(file, piece, at, piece.length - at);
}

const REMEDIES: Record<string, string> = {
  ENOSPC: 'make room on the disk or choose another place',
  EDQUOT: 'make room in the quota or choose another place',
  EACCES: 'choose a folder that you may write to',
  EPERM: 'choose a folder that you may write to',
  EROFS: 'choose a folder on a disk that can be written',
  ENOTDIR: 'choose a place inside a folder',
};

/** The error for a place that cannot be written. */
export function cannotWrite(place: string, cause: unknown): InputError {
  const { code, message } = cause as NodeJS.ErrnoException;
  const what = code === 'ENOSPC' || code === 'EDQUOT' ? 'no space left' : `cannot be written (${code ?? message})`;
  return new InputError(place, what, REMEDIES[code ?? ''] ?? 'choose another place', { cause });
}
