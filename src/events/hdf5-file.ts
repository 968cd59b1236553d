import { closeSync } from 'node:fs';
import { resolve } from 'node:path';
import type { File as HdfFile, Metadata } from 'h5wasm/node';
import { InputError } from '../study/input-error';
import { openFile, sizeOf } from './byte-source';
import type { NamedColumn } from './named-columns';
import { isReadable, type PackedField } from './packed-field';

type Hdf5 = typeof import('h5wasm/node');
type Module = Awaited<Hdf5['ready']>;

/** A column of an HDF5 file: a data set of one dimension, or a member of a compound one. */
export interface Hdf5Column extends NamedColumn {
  /** The path of the data set, without a leading slash. */
  path: string;
  /** Bytes of one row of the data set, all members together. */
  rowBytes: number;
  /** Rows of a chunk, 1 where the data set is contiguous. */
  chunkRows: number;
  /** Where the value stands in the row; `text` for variable-length text. */
  field: PackedField | 'text' | null;
}

/** Most objects of a file that are looked at: links may go in circles. */
const MOST_OBJECTS = 10_000;
/** What HDF5 itself opens while it words an error. */
const ERROR_SCRATCH = /^\/tmp\/tmpfile_\w+$/;
const REMEDY = 'copy or make the file again';

/** An HDF5 file opened for reading. Nothing in it can make another file be opened. */
export class Hdf5File {
  private constructor(
    private readonly hdf5: Hdf5,
    private readonly module: Module,
    private readonly path: string,
    private readonly name: string,
  ) {}

  private file!: HdfFile;

  static async open(path: string, name: string): Promise<Hdf5File> {
    closeSync(openFile(path, name));
    const hdf5 = await import('h5wasm/node');
    const module = await hdf5.ready;
    // Without it, a failed read hands out whatever memory held before.
    module.activate_throwing_error_handler();
    const opened = new Hdf5File(hdf5, module, resolve(path), name);
    opened.file = opened.guard(() => new hdf5.File(opened.path, 'r'));
    return opened;
  }

  close(): void {
    this.file.close();
  }

  /** Every column of the file. Links to other files are passed over. */
  columns(): Hdf5Column[] {
    const columns: Hdf5Column[] = [];
    let objects = 0;
    const groups = [''];
    for (let group = groups.pop(); group !== undefined; group = groups.pop()) {
      for (const key of this.keysOf(group)) {
        if (++objects > MOST_OBJECTS) {
          throw new InputError(
            this.name,
            `more than ${MOST_OBJECTS} objects`,
            'give a file of one table or group of columns',
          );
        }
        const path = group === '' ? key : `${group}/${key}`;
        const metadata = this.metadataOf(path);
        if (metadata === 'group') groups.push(path);
        else if (metadata !== null) columns.push(...columnsOf(path, metadata));
      }
    }
    return columns.sort((a, b) => (a.name < b.name ? -1 : 1));
  }

  /** Rows `[from, to)` of a data set as bytes. */
  bytes({ path, rowBytes }: Hdf5Column, from: number, to: number): Uint8Array {
    const { module, file } = this;
    const size = (to - from) * rowBytes;
    return this.guard(() => {
      const place = module._malloc(size);
      if (place === 0) throw new Error(`no memory for ${size} bytes`);
      try {
        module.get_dataset_data(file.file_id, `/${path}`, [BigInt(to - from)], [BigInt(from)], [1n], BigInt(place));
        return module.HEAPU8.slice(place, place + size);
      } finally {
        module._free(place);
      }
    });
  }

  /** Rows `[from, to)` of a data set of variable-length texts. */
  texts({ path }: Hdf5Column, from: number, to: number): string[] {
    return this.guard(() => new this.hdf5.Dataset(this.file.file_id, `/${path}`).slice([[from, to]]) as string[]);
  }

  private keysOf(group: string): string[] {
    return this.guard(() => new this.hdf5.Group(this.file.file_id, `/${group}`).keys());
  }

  /** What stands at a path; `null` where it is neither group nor data set or leads out of the file. */
  private metadataOf(path: string): Metadata | 'group' | null {
    const { module, file } = this;
    try {
      return this.guard(() => {
        const type = module.get_type(file.file_id, `/${path}`);
        if (type === module.H5G_GROUP) return 'group';
        return type === module.H5G_DATASET ? module.get_dataset_metadata(file.file_id, `/${path}`) : null;
      });
    } catch (cause) {
      if (cause instanceof Outward) return null;
      throw cause;
    }
  }

  /**
   * Calls the library while it can open this file alone: external links, virtual data sets and raw data kept outside
   * name other files, and the library would follow them in silence, or give zeros where they are absent.
   */
  private guard<T>(work: () => T): T {
    const files = this.module.FS as unknown as {
      open: (...args: unknown[]) => unknown;
      ErrnoError: new (n: number) => Error;
    };
    const { open } = files;
    // The library looks for filters and drivers there, of its own accord.
    const plugins = this.module.get_plugin_search_paths();
    let outward: string | null = null;
    files.open = (path, ...rest) => {
      const asked = resolve(String(path));
      if (asked !== this.path && !ERROR_SCRATCH.test(asked)) {
        if (!plugins.some((folder) => asked.startsWith(folder))) outward ??= asked;
        throw new files.ErrnoError(NO_ENTRY);
      }
      return open(path, ...rest);
    };
    let result: T;
    try {
      result = work();
    } catch (cause) {
      throw outward === null ? this.damage(cause) : new Outward(this.name, outward);
    } finally {
      files.open = open;
    }
    if (outward !== null) throw new Outward(this.name, outward);
    return result;
  }

  private damage(cause: unknown): InputError {
    // The library's message is a stack of its own calls: the last entry says why.
    const reasons = [...(cause as Error).message.matchAll(/#\d+:.*?\(\): (.*)/g)].map(([, reason]) => reason);
    const reason = (reasons.at(-1) ?? (cause as Error).message).replaceAll(this.path, this.name);
    const what = `damaged or no HDF5 (${reason}; ${sizeOf(this.path, this.name)} bytes)`;
    return new InputError(this.name, what, REMEDY, { cause });
  }
}

/** `ENOENT` as Emscripten numbers it. */
const NO_ENTRY = 44;

class Outward extends InputError {
  constructor(name: string, path: string) {
    super(name, `points at another file, ${path}`, 'copy the data into one file, as h5repack does');
  }
}

function columnsOf(path: string, metadata: Metadata): Hdf5Column[] {
  const { shape, chunks, size, compound_type: compound, virtual_sources: virtual } = metadata;
  const rank = shape?.length ?? 0;
  if (rank === 0) return [];
  const base = { path, rows: shape![0], rowBytes: size, chunkRows: chunks?.[0] ?? 1 };
  const column = (name: string, of: Metadata, offset: number, bigEndianKept: boolean): Hdf5Column => {
    const fault = rank > 1 ? `${rank} dimensions` : virtual?.length ? 'data of other files' : faultOf(of);
    const field = fault === '' ? fieldOf(of, offset, bigEndianKept) : null;
    return { ...base, name, field, fault };
  };
  if (!compound) return [column(path, metadata, 0, false)];
  return compound.members.map((member) => column(`${path}:${member.name}`, member, member.offset, true));
}

/** Classes of HDF5 types (H5T_class_t). */
const INTEGER = 0;
const FLOAT = 1;
const STRING = 3;
const ENUM = 8;
const CLASSES = [
  '',
  '',
  'times',
  '',
  'bit fields',
  'opaque data',
  'nested compounds',
  'references',
  '',
  'lists',
  'arrays',
];

function faultOf(metadata: Metadata): string {
  const { type, size, vlen } = metadata;
  if (type === STRING || (type === ENUM && metadata.enum_type?.type === INTEGER)) return '';
  if (type !== INTEGER && type !== FLOAT) return CLASSES[type] || 'values of an unknown class';
  return vlen || !isReadable(fieldOf(metadata, 0, false) as PackedField) ? `numbers of ${size} bytes` : '';
}

/** The library turns the bytes of plain numbers round where they are big-endian, but not those inside a compound. */
function fieldOf(metadata: Metadata, offset: number, bigEndianKept: boolean): PackedField | 'text' | null {
  const { type, size, signed, vlen, littleEndian, enum_type: names } = metadata;
  if (type === STRING && vlen) return 'text';
  const boolean = type === ENUM && 'FALSE' in (names?.members ?? {}) && 'TRUE' in (names?.members ?? {});
  const kind =
    type === STRING
      ? 'bytes'
      : type === FLOAT
        ? 'float'
        : boolean && size === 1
          ? 'boolean'
          : signed
            ? 'signed'
            : 'unsigned';
  return { offset, size, kind, littleEndian: littleEndian || !bigEndianKept };
}
