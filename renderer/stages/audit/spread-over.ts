/** A list over some places, put where those stand among all; NaN elsewhere. */
export function spreadOver(values: ArrayLike<number>, places: readonly string[], all: readonly string[]): Float64Array {
  const spread = new Float64Array(all.length).fill(NaN);
  places.forEach((name, i) => {
    const at = all.indexOf(name);
    if (at >= 0) spread[at] = values[i]!;
  });
  return spread;
}
