import { Assembly, Layout, whereGranted } from '../numerics/assembly';
import { EXPONENTIAL, NORMAL } from '../numerics/ziggurat';
import type { ColumnPlan } from './column-plan';
import code from './quick-columns.as?assembly';

interface Exports {
  /** Addresses: of the stream's state, of the tables of layers, of the first byte behind these. */
  state: WebAssembly.Global;
  tables: WebAssembly.Global;
  free: WebAssembly.Global;
  begin(...addresses: number[]): void;
  draw(
    halves: number,
    ones: number,
    others: number,
    below: number,
    scaled: boolean,
    replicas: number,
    into: number,
  ): void;
}

const assembly = new Assembly<Exports>(code);

/**
 * Draws the replicas of columns in WebAssembly (`quick-columns.as.ts`): the same bytes as `draw.ts` alone would give, in half the
 * time, and without warming a compiler first.
 */
export class QuickColumns {
  private readonly exports: Exports;
  private readonly state: Int32Array;
  private readonly offset: Float64Array;
  private readonly slope: Float64Array;
  private readonly reciprocal: Float64Array;
  private readonly scale: Float64Array;
  private readonly cells: Int32Array;
  private readonly rows: Float64Array[];

  /**
   * For columns of `outcomes` outcomes and at most `replicas` replicas at a time. `null` where the system grants no
   * memory for it.
   */
  static over(outcomes: number, replicas: number): QuickColumns | null {
    return whereGranted(() => new QuickColumns(outcomes, replicas));
  }

  private constructor(outcomes: number, replicas: number) {
    const memory = new WebAssembly.Memory({ initial: 1 });
    this.exports = assembly.in(memory);
    const { state, tables, free } = this.exports;
    const layout = new Layout(free.value as number, 8);
    const [variates, exponentials, offset, slope, reciprocal, scale] = Array.from({ length: 6 }, () =>
      layout.place(8 * outcomes),
    );
    const cells = layout.place(4 * outcomes);
    const words = layout.place(4 * outcomes);
    const list = layout.place(4 * (outcomes + 1));
    const rows = layout.place(8 * outcomes * replicas);
    layout.over(memory);
    this.exports.begin(outcomes, cells, variates!, exponentials!, offset!, slope!, reciprocal!, scale!, words, list);

    const { buffer } = memory;
    let table = tables.value as number;
    for (const values of [NORMAL, EXPONENTIAL].flatMap(({ edge, step, height }) => [edge, step, height])) {
      new Float64Array(buffer, table, values.length).set(values);
      table += values.byteLength;
    }
    this.state = new Int32Array(buffer, state.value as number, 4);
    this.offset = new Float64Array(buffer, offset, outcomes);
    this.slope = new Float64Array(buffer, slope, outcomes);
    this.reciprocal = new Float64Array(buffer, reciprocal, outcomes);
    this.scale = new Float64Array(buffer, scale, outcomes);
    this.cells = new Int32Array(buffer, cells, outcomes);
    this.rows = Array.from({ length: replicas }, (_, r) => new Float64Array(buffer, rows + 8 * outcomes * r, outcomes));
  }

  /**
   * Draws `replicas` replicas of a column that is not drawn in logarithms from a stream that is in `state`. The value of its
   * outcome `k` in replica `r` goes to `out[at + r * stride + k]`.
   */
  draw(plan: ColumnPlan, state: Int32Array, replicas: number, out: Float64Array, at: number, stride: number): void {
    const { cells, halves, ones, others, below, scale } = plan;
    this.state.set(state);
    this.cells.set(cells);
    this.offset.set(plan.offset);
    this.slope.set(plan.slope);
    this.reciprocal.set(plan.reciprocal);
    if (scale) this.scale.set(scale);
    const into = this.rows[0]!.byteOffset;
    this.exports.draw(halves.length, ones.length, others.length, below.length, scale !== null, replicas, into);
    for (let replica = 0; replica < replicas; replica++) out.set(this.rows[replica]!, at + replica * stride);
  }
}
