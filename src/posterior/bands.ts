/** A band over the outcomes of a column that holds all of them at once. */
export interface Band {
  lower: Float64Array;
  upper: Float64Array;
  /** Half-width in standard deviations, the same for every outcome. */
  deviates: number;
}

/**
 * Simultaneous credible band of one column, by the largest deviation of its replicas: each replica's greatest
 * `|p_k - mean_k| / sd_k` over the outcomes, and of these the least that `credibility` of the replicas do not exceed.
 * The band is `mean_k -+ deviates * sd_k` within `[0, 1]`, never above 0 at its lower edge where there are no events.
 *
 * `replicas` is `[replicas, outcomes]`, `mean`, `sd` and `events` `[outcomes]`. An outcome of sd 0 is certain and takes no
 * part. Throws `RangeError` without replicas.
 */
export function simultaneousBand(
  replicas: Float64Array,
  mean: Float64Array,
  sd: Float64Array,
  events: Float64Array,
  credibility: number,
): Band {
  const outcomes = mean.length;
  const count = replicas.length / outcomes;
  if (count === 0) throw new RangeError('a band needs replicas');
  const largest = new Float64Array(count);
  for (let r = 0; r < count; r++) {
    for (let k = 0; k < outcomes; k++) {
      if (sd[k] === 0) continue;
      largest[r] = Math.max(largest[r]!, Math.abs(replicas[r * outcomes + k]! - mean[k]!) / sd[k]!);
    }
  }
  const deviates = largest.sort()[Math.min(count, Math.ceil(credibility * count)) - 1]!;
  const lower = mean.map((m, k) => (events[k] === 0 && sd[k]! > 0 ? 0 : Math.max(0, m - deviates * sd[k]!)));
  return { lower, upper: mean.map((m, k) => Math.min(1, m + deviates * sd[k]!)), deviates };
}
