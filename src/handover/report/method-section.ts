import { formatPercent } from '../../audit/wording';
import { markup, Markup } from './markup';
import type { ReportSource } from './report-source';
import type { Section } from './section';

/** What was computed, by which published methods. */
export const methodSection: Section = { id: 'method', title: 'Method', body: method };

/** A source; `fromMemory` where title, page or number was recalled and should be confirmed before it is cited on. */
interface Source {
  text: string;
  fromMemory?: boolean;
}

const SOURCES = {
  kish: { text: 'L. Kish, Survey Sampling, Wiley, 1965', fromMemory: true },
  johnson: {
    text: 'S. Kotz, N. Balakrishnan, N. L. Johnson, Continuous Multivariate Distributions, ch. 49',
    fromMemory: true,
  },
  bohm: {
    text: 'G. Bohm, G. Zech, Statistics of weighted Poisson events and its applications, NIM A 748 (2014) 1',
    fromMemory: true,
  },
  minka: { text: 'T. P. Minka, Estimating a Dirichlet distribution, 2000', fromMemory: true },
  marsaglia: {
    text: 'G. Marsaglia, W. W. Tsang, A simple method for generating gamma variables, ACM TOMS 26 (2000) 363',
  },
  connor: { text: 'R. J. Connor, J. E. Mosimann, Concepts of independence for proportions, JASA 64 (1969) 194' },
  besag: { text: 'J. Besag, P. Clifford, Sequential Monte Carlo p-values, Biometrika 78 (1991) 301', fromMemory: true },
  benjamini: {
    text: 'Y. Benjamini, Y. Hochberg, Controlling the false discovery rate, J. R. Stat. Soc. B 57 (1995) 289',
    fromMemory: true,
  },
  weyl: { text: 'H. Weyl, inequality for singular values of a sum, Math. Ann. 71 (1912) 441', fromMemory: true },
  jcgm: { text: 'JCGM 101:2008, Supplement 1 to the GUM, 7.9 (adaptive Monte Carlo)', fromMemory: true },
} satisfies Record<string, Source>;

const ORDER = Object.keys(SOURCES) as (keyof typeof SOURCES)[];
const cite = (...keys: (keyof typeof SOURCES)[]): string => `[${keys.map((key) => ORDER.indexOf(key) + 1).join(', ')}]`;

function method({ analysis }: ReportSource): Markup {
  const { study, tally } = analysis;
  const level = formatPercent(study.credibility);
  const weighted = tally.weighted
    ? markup` Events are weighted: the content of a cell is a scaled gamma variate with the mean and variance of its summed weights ${cite('bohm')}, normalised over the column; such a column is no Dirichlet, and the intervals of its cells are those of a Beta matched to exact mean and variance.`
    : null;
  const sources = ORDER.map((key) => {
    const { text, fromMemory } = SOURCES[key] as Source;
    return markup`<li>${text}${fromMemory ? markup` <i>(recalled from memory)</i>` : null}</li>`;
  });
  return markup`<p><b>Posterior.</b> The events of a column are multinomial over its outcomes; with Dirichlet pseudo-counts the posterior is Dirichlet, its cells are Beta ${cite('johnson')}, and columns are independent.${weighted} Effective entries are the squared sum of weights over the sum of their squares ${cite('kish')}. ${'neighbours' in study.prior ? `The strength of the neighbour prior is at the maximum of the Dirichlet-multinomial evidence ${cite('minka')}.` : ''}</p>
<p><b>Ensemble.</b> Each column of a replica is gamma variates over their sum ${cite('marsaglia')}. The stream of random numbers is fixed by seed, column and block alone. For samplers the columns are handed over as sequential Beta parameters too ${cite('connor')}. How many replicas are needed for so many digits follows the adaptive rule of ${cite('jcgm')}.</p>
<p><b>Answers.</b> A limit is judged by the posterior probability of lying beyond it, at ${level}. Efficiency, acceptance and spill are Beta (matched ones where events are weighted); feed-in and influence take their probabilities from replicas of the ensemble itself.</p>
<p><b>Slope bias.</b> The response of the lower and the upper half of a bin, weighted as the reference spectrum has them instead of the calibration; compared with the cell's own standard deviation.</p>
<p><b>Run drift.</b> Likelihood-ratio statistic G² of homogeneity with a sequential parametric bootstrap ${cite('besag')}; adjusted over the columns ${cite('benjamini')}; the size of a drift is the total-variation distance of a run from the pool.</p>
<p><b>Conditioning.</b> Singular values against the spectral norm of the replicas' deviations ${cite('weyl')}.</p>
<p><b>Influence.</b> The variance of the folded reference spectrum from the matrix is the sum over columns of the squared content times the covariance of the column, in closed form, against the Poisson variance of the data to come.</p>
<ol class="sources">${sources}</ol>`;
}
