/** Relative accuracy of the norm: far below the spread of what it is taken of. */
export const NORM_TOLERANCE = 3e-3;

/** Steps after which the search ends in any case: a flat top of the spectrum can hide from it, and then differs little. */
const MOST_STEPS = 100;

/**
 * Spectral norm (largest singular value) of a `[rows, columns]` matrix in C order, to `NORM_TOLERANCE`, from below.
 * Power iteration in Lanczos' form: the largest Ritz value of `A^T A` on the Krylov space of one start vector, which needs about a
 * fifth of the products that plain powers do. Ends when the Ritz pair's residual bounds the error.
 * Source: Golub & Kahan, SIAM J. Numer. Anal. B 2 (1965) 205 (from memory); Parlett, "The Symmetric Eigenvalue Problem" (1980).
 */
export function spectralNorm(matrix: Float64Array, rows: number, columns: number): number {
  let largest = 0;
  for (let i = 0; i < matrix.length; i++) largest = Math.max(largest, Math.abs(matrix[i]!));
  // Fourth powers are taken further down: in units of the largest element they neither vanish nor overflow.
  return largest === 0 ? 0 : largest * Math.sqrt(largestOfGram(matrix, 1 / largest, rows, columns));
}

/** Largest eigenvalue of `A^T A`, `A` the matrix times `unit`. */
function largestOfGram(matrix: Float64Array, unit: number, rows: number, columns: number): number {
  let v: Float64Array = startVector(columns);
  let before: Float64Array = new Float64Array(columns);
  const diagonal: number[] = [];
  const beside: number[] = [];
  for (let step = 1; ; step++) {
    const next = gramProduct(matrix, unit, rows, columns, v);
    const previous = beside.at(-1) ?? 0;
    for (let i = 0; i < columns; i++) next[i]! -= previous * before[i]!;
    const alpha = dot(v, next);
    for (let i = 0; i < columns; i++) next[i]! -= alpha * v[i]!;
    diagonal.push(alpha);
    const beta = Math.sqrt(dot(next, next));
    const top = largestEigenvalue(diagonal, beside);
    const residual = beta * lastComponent(diagonal, beside, top);
    if (!(residual > 2 * NORM_TOLERANCE * top) || step === MOST_STEPS) return Math.max(0, top);
    beside.push(beta);
    before = v;
    for (let i = 0; i < columns; i++) next[i]! /= beta;
    v = next;
  }
}

/** Golden-ratio sequence about 0: fixed, of no pattern that a singular vector could be orthogonal to by design. */
function startVector(length: number): Float64Array {
  const GOLDEN = (Math.sqrt(5) - 1) / 2;
  const v = new Float64Array(length).map((_, i) => (((i + 1) * GOLDEN) % 1) - 0.45);
  const norm = Math.sqrt(dot(v, v));
  return v.map((x) => x / norm);
}

function gramProduct(matrix: Float64Array, unit: number, rows: number, columns: number, v: Float64Array): Float64Array {
  const result = new Float64Array(columns);
  const square = unit * unit;
  for (let r = 0, at = 0; r < rows; r++, at += columns) {
    let sum = 0;
    for (let c = 0; c < columns; c++) sum += matrix[at + c]! * v[c]!;
    sum *= square;
    for (let c = 0; c < columns; c++) result[c]! += sum * matrix[at + c]!;
  }
  return result;
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}

/** Largest eigenvalue of a symmetric tridiagonal matrix by bisection on the signs of its pivots (Sturm). */
function largestEigenvalue(diagonal: number[], beside: number[]): number {
  let low = Math.max(...diagonal);
  let high = 0;
  diagonal.forEach((a, i) => (high = Math.max(high, a + (beside[i - 1] ?? 0) + (beside[i] ?? 0))));
  // Each turn halves the interval: to a hundredth of the tolerance of the norm.
  while (high - low > (NORM_TOLERANCE / 100) * high) {
    const middle = (low + high) / 2;
    if (isAboveAll(diagonal, beside, middle)) high = middle;
    else low = middle;
  }
  return high;
}

function isAboveAll(diagonal: number[], beside: number[], x: number): boolean {
  let pivot = Infinity;
  return diagonal.every((a, i) => {
    pivot = x - a - (i > 0 ? beside[i - 1]! ** 2 / pivot : 0);
    return pivot > 0;
  });
}

/** Last component of the unit eigenvector of the top eigenvalue, by the recurrence from the first. */
function lastComponent(diagonal: number[], beside: number[], top: number): number {
  let before = 0;
  let x = 1;
  let norm = 1;
  for (let i = 0; i + 1 < diagonal.length; i++) {
    [before, x] = [x, ((top - diagonal[i]!) * x - (i > 0 ? beside[i - 1]! : 0) * before) / beside[i]!];
    norm += x * x;
  }
  return Math.abs(x) / Math.sqrt(norm);
}
