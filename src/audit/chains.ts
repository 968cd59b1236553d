/**
 * Split-chain potential scale reduction of one quantity in several chains of equal, even length: 1 where they agree, above
 * about 1.01 where they have not mixed. 1 for chains that do not move at all.
 * Source: Gelman et al., "Bayesian Data Analysis" (3rd ed.), 11.4; Vehtari et al., Bayesian Analysis 16 (2021) 667 (without ranks).
 */
export function splitRhat(chains: readonly Float64Array[]): number {
  const { within, pooled } = variances(chains.flatMap(halvesOf));
  return within > 0 ? Math.sqrt(pooled / within) : 1;
}

/**
 * Effective number of independent draws among all draws of all chains: from autocorrelations over split chains, summed in
 * pairs as long as the pairs are positive and falling (Geyer's initial monotone sequence; same sources). All draws where they
 * do not vary; never more than `count log10(count)`, the bound that keeps antithetic chains finite.
 */
export function effectiveDraws(chains: readonly Float64Array[]): number {
  const split = chains.flatMap(halvesOf);
  const length = split[0]!.length;
  const count = split.length * length;
  const { within, pooled } = variances(split);
  if (!(within > 0)) return count;
  const centred = split.map(centredOf);
  const correlation = (lag: number): number => {
    const covariance = centred.reduce((sum, chain) => sum + autocovariance(chain, lag), 0) / split.length;
    return 1 - (within - covariance) / pooled;
  };
  let sum = 0;
  let before = Infinity;
  for (let lag = 0; lag + 1 < length; lag += 2) {
    const pair = (lag === 0 ? 1 : correlation(lag)) + correlation(lag + 1);
    if (!(pair > 0)) break;
    before = Math.min(before, pair);
    sum += before;
  }
  return Math.min(count / Math.max(2 * sum - 1, 1 / Math.log10(count)), count * Math.log10(count));
}

function halvesOf(chain: Float64Array): Float64Array[] {
  const half = chain.length / 2;
  if (!Number.isInteger(half) || half < 2) throw new RangeError(`a chain of ${chain.length} draws has no two halves`);
  return [chain.subarray(0, half), chain.subarray(half)];
}

/** Mean variance of the chains, and the pooled estimate `(n - 1)/n within + variance of the chains' means`. */
function variances(chains: readonly Float64Array[]): { within: number; pooled: number } {
  const length = chains[0]!.length;
  const means = Float64Array.from(chains, meanOf);
  const all = meanOf(means);
  const between = means.reduce((sum, mean) => sum + (mean - all) ** 2, 0) / (means.length - 1);
  const within =
    chains.reduce((sum, chain) => sum + autocovariance(centredOf(chain), 0), 0) / chains.length / (1 - 1 / length);
  return { within, pooled: within * (1 - 1 / length) + between };
}

/** Of a chain about 0. */
function autocovariance(chain: Float64Array, lag: number): number {
  let sum = 0;
  for (let i = lag; i < chain.length; i++) sum += chain[i]! * chain[i - lag]!;
  return sum / chain.length;
}

function centredOf(chain: Float64Array): Float64Array {
  const mean = meanOf(chain);
  return chain.map((x) => x - mean);
}

function meanOf(values: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i]!;
  return sum / values.length;
}
