import { tmpdir } from 'node:os';
import type { DuckDBConnection, DuckDBDataChunk, DuckDBInstance, DuckDBValue } from '@duckdb/node-api';
import { Cancelled, InputError } from '../study/input-error';

/** Threads of one reading: DuckDB decodes beside the thread that takes the values, and files are split over workers. */
const THREADS = '1';
/** What DuckDB may hold, a few row groups: its own limit would be a share of the whole machine. */
const MEMORY = '400MB';

/**
 * Settings in the order that locks: footers are kept, the one path may be reached, then nothing else, then nothing more may
 * be set.
 */
const LOCKS = [
  'SET parquet_metadata_cache = true',
  'SET allowed_paths = [$1]',
  'SET enable_external_access = false',
  'SET lock_configuration = true',
] as const;

/** The file of the path `$1` as a table, the number of each row in a last column. */
const TABLE =
  'read_parquet($1, hive_partitioning = false, union_by_name = false, filename = false, file_row_number = true)';

/** A column of a file as DuckDB tells it. */
export interface TypedColumn {
  name: string;
  /** The SQL name of its type, such as `BIGINT` or `DECIMAL(18,3)`. */
  type: string;
}

/** What is asked of a file: SQL expressions over its columns, for a range of its rows. */
export interface Query {
  expressions: string[];
  columns: number;
  from: number;
  to: number;
}

/** The databases in use, by the path they can reach: the units of a file share one, for to make it takes as long as a million rows. */
const databases = new Map<string, { instance: Promise<DuckDBInstance>; users: number }>();

function take(path: string): Promise<DuckDBInstance> {
  let database = databases.get(path);
  if (database === undefined) {
    database = { instance: lockedTo(path), users: 0 };
    databases.set(path, database);
    // One that could not be made is no use to the next one who asks.
    database.instance.catch(() => databases.delete(path));
  }
  database.users++;
  return database.instance;
}

async function give(path: string): Promise<void> {
  const database = databases.get(path)!;
  if (--database.users > 0) return;
  databases.delete(path);
  (await database.instance).closeSync();
}

async function lockedTo(path: string): Promise<DuckDBInstance> {
  const { DuckDBInstance } = await import('@duckdb/node-api');
  const instance = await DuckDBInstance.create(':memory:', {
    threads: THREADS,
    memory_limit: MEMORY,
    temp_directory: tmpdir(),
    autoinstall_known_extensions: 'false',
    autoload_known_extensions: 'false',
  });
  const connection = await instance.connect();
  for (const lock of LOCKS) await connection.run(lock, lock.includes('$1') ? [path] : []);
  connection.closeSync();
  return instance;
}

/**
 * One connection to a database in memory that can reach one file and nothing else. The file's path is always bound, and
 * its columns are named by position: no text of a study or file ever becomes SQL.
 */
export class OneFile {
  private constructor(
    private readonly connection: DuckDBConnection,
    private readonly path: string,
    private readonly name: string,
  ) {}

  static async open(path: string, name: string): Promise<OneFile> {
    const connection = await (await take(path)).connect();
    return new OneFile(connection, path, name);
  }

  close(): void {
    this.connection.closeSync();
    void give(this.path);
  }

  /** All columns, in order. Throws `InputError` where the file is damaged or of another format. */
  async columns(): Promise<TypedColumn[]> {
    try {
      const result = await this.connection.run(`SELECT * FROM ${TABLE} LIMIT 0`, [this.path]);
      return result.columnNames().map((name, i) => ({ name, type: String(result.columnType(i)) }));
    } catch (cause) {
      throw this.fault(0, cause);
    }
  }

  /** The number of rows. */
  count(): Promise<number> {
    return this.number(`SELECT count(*)::DOUBLE FROM ${TABLE}`);
  }

  /** Rows of the first group of rows; 0 where there is none. Writers make all groups but the last alike. */
  rowsOfGroup(): Promise<number> {
    return this.number('SELECT row_group_num_rows::DOUBLE FROM parquet_metadata($1) LIMIT 1');
  }

  /** The one number that a query of the path `$1` gives; 0 where it gives none. */
  private async number(sql: string): Promise<number> {
    try {
      const rows = await (await this.connection.run(sql, [this.path])).getRowsJS();
      return (rows[0]?.[0] ?? 0) as number;
    } catch (cause) {
      throw this.fault(0, cause);
    }
  }

  /**
   * Rows `[from, to)` of the file, in order: `expressions` over its columns `c0`, `c1`, ..., in chunks. The last of the
   * `columns` columns is the row number, counted from 0: DuckDB passes over row groups outside the range. The
   * stream of a DuckDB result ends quietly where the reading fails: one that ends before all rows have come throws
   * `InputError` with DuckDB's message.
   */
  async *rows(query: Query, signal?: AbortSignal): AsyncGenerator<DuckDBDataChunk> {
    const interrupt = (): void => this.connection.interrupt();
    signal?.addEventListener('abort', interrupt);
    const wanted = query.to - query.from;
    let passed = 0;
    try {
      const result = await this.connection.stream(this.select(query), this.bound(query));
      // The next chunk is asked for before this one is worked on: DuckDB decodes meanwhile.
      let next = result.fetchChunk();
      while (passed < wanted) {
        const chunk = await next;
        if (signal?.aborted) throw new Cancelled();
        if (chunk === null || chunk.rowCount === 0) throw await this.reasonOf(query, passed);
        passed += chunk.rowCount;
        if (passed < wanted) next = result.fetchChunk();
        yield chunk;
      }
    } catch (cause) {
      if (signal?.aborted) throw new Cancelled();
      throw cause instanceof InputError || cause instanceof Cancelled ? cause : this.fault(passed, cause);
    } finally {
      signal?.removeEventListener('abort', interrupt);
    }
  }

  private select(query: Query): string {
    // Where no column serves the rows are counted all the same.
    const expressions = query.expressions.length > 0 ? query.expressions.join(', ') : '0';
    return `SELECT ${expressions} FROM ${this.from(query)}`;
  }

  private from({ columns }: Query): string {
    const names = Array.from({ length: columns }, (_, i) => `c${i}`);
    return `${TABLE} AS t(${names.join(', ')}) WHERE ${names.at(-1)} >= $2 AND ${names.at(-1)} < $3`;
  }

  private bound({ from, to }: Query): DuckDBValue[] {
    return [this.path, BigInt(from), BigInt(to)];
  }

  /** Why a stream broke off: the same values asked for once more as an aggregate, which does tell. */
  private async reasonOf(query: Query, passed: number): Promise<InputError> {
    // Of hashes, for which every value must be decoded: a count may come from the footer.
    const hashes = query.expressions.map((expression) => `bit_xor(hash(${expression}))`);
    try {
      const sql = `SELECT ${[...hashes, 'count(*)'].join(', ')} FROM ${this.from(query)}`;
      await this.connection.run(sql, this.bound(query));
    } catch (cause) {
      return this.fault(passed, cause);
    }
    const what = `${passed} rows where its footer tells ${query.to - query.from}`;
    return new InputError(this.name, what, 'copy or make the file again');
  }

  private fault(passed: number, cause: unknown): InputError {
    const message = (cause as Error).message.replaceAll(this.path, this.name);
    const where = passed > 0 ? ` behind row ${passed}` : '';
    return new InputError(this.name, `damaged or unreadable${where} (${message})`, 'copy or make the file again', {
      cause,
    });
  }
}
