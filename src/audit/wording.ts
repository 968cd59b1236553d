/** Numbers as people read them: thin no-break spaces between thousands, a true minus sign, digits that mean something. */
const THIN_SPACE = '\u202f';
const MINUS = '\u2212';
/** Decimal exponents outside this range are written as a power of ten. */
const PLAIN_EXPONENTS = { least: -4, most: 6 };
/** Digits of a number that comes without an uncertainty. */
const PLAIN_DIGITS = 3;
/** Digits that any decimal keeps on its way through a double. */
const EXACT_DIGITS = 15;

/** A whole number: `12 345`. */
export function formatCount(n: number): string {
  return Math.abs(n) < 1e15 ? fixed(n, 0) : formatNumber(n);
}

/** A number of events to aim for, rounded up to two digits: `1 300` for 1 234. Infinite is `no number of`. */
export function formatEvents(n: number): string {
  if (!Number.isFinite(n)) return 'no number of';
  const step = 10 ** Math.max(0, exponentOf(n, 1) - 1);
  return formatCount(Math.ceil(n / step) * step);
}

/** A count with its noun, singular for one: `1 event`, `12 345 events`. */
export function countOf(n: number, noun: string): string {
  return `${formatCount(n)} ${noun}${n === 1 ? '' : 's'}`;
}

/** A number of events to aim for, with its noun: `about` is put before it by the caller. */
export function eventsOf(n: number, more: '' | 'more ' = ''): string {
  const count = formatEvents(n);
  return `${count} ${more}event${count === '1' ? '' : 's'}`;
}

/** A number to `digits` significant digits; fewer where these say it all, more for whole numbers below ten million. */
export function formatNumber(x: number, digits = PLAIN_DIGITS): string {
  if (!Number.isFinite(x)) return Number.isNaN(x) ? 'not a number' : `${x < 0 ? MINUS : ''}\u221e`;
  const whole = exponentOf(x, EXACT_DIGITS);
  if (Number.isInteger(x) && whole <= PLAIN_EXPONENTS.most) return fixed(x, 0);
  const shown = Math.min(digits, digitsOf(x));
  const exponent = exponentOf(x, shown);
  return withPower(exponent, (power) => fixed(x / 10 ** power, Math.max(0, shown - 1 - exponent + power)));
}

/** A value and its standard uncertainty, that to two significant digits and the value to match: `12.30 ± 0.12`. */
export function formatUncertain(value: number, uncertainty: number): string {
  if (!(uncertainty > 0)) return formatNumber(value, 6);
  const exponent = Math.max(exponentOf(value, EXACT_DIGITS), exponentOf(uncertainty, 2));
  return withPower(exponent, (power) => {
    const decimals = decimalsOf(uncertainty / 10 ** power);
    const text = `${fixed(value / 10 ** power, decimals)} ± ${fixed(uncertainty / 10 ** power, decimals)}`;
    return power === 0 ? text : `(${text})`;
  });
}

/** A value with its interval, in digits that show two significant ones of the half-width: `0.412 (0.401 to 0.423)`. */
export function formatInterval(value: number, lower: number, upper: number): string {
  const half = (upper - lower) / 2;
  if (!(half > 0)) return formatNumber(value, 6);
  const exponent = Math.max(exponentOf(value, EXACT_DIGITS), exponentOf(half, 2));
  return withPower(exponent, (power) => {
    const decimals = decimalsOf(half / 10 ** power);
    const [v, lo, hi] = [value, lower, upper].map((x) => fixed(x / 10 ** power, decimals));
    const text = `${v} (${lo} to ${hi})`;
    return power === 0 ? text : `[${text}]`;
  });
}

/** A share in percent: `4.1 %`. */
export function formatPercent(share: number, digits = PLAIN_DIGITS): string {
  return `${formatNumber(100 * share, digits)} %`;
}

/** A share in percent with its interval: `4.1 % (3.2 to 5.1)`. One-sided limits read `below` and `above`. */
export function formatShare(share: number, lower: number, upper: number): string {
  if (lower === 0 && upper < 1) return `${formatPercent(share, 2)} (below ${formatPercent(upper, 2)})`;
  if (upper === 1 && lower > 0) return `${formatPercent(share)} (above ${formatPercent(lower)})`;
  return formatInterval(100 * share, 100 * lower, 100 * upper).replace(' (', ' % (');
}

/** Exponent of the leading digit once the number is rounded to `digits` digits; 0 for 0. */
function exponentOf(x: number, digits: number): number {
  return x === 0 ? 0 : Number(x.toExponential(digits - 1).split('e')[1]);
}

/** Significant digits of a number, trailing zeros apart. */
function digitsOf(x: number): number {
  const digits = x
    .toExponential(EXACT_DIGITS - 1)
    .split('e')[0]!
    .replace(/[-.]/g, '');
  return digits.replace(/0+$/, '').length || 1;
}

/** Decimals that show two significant digits of an uncertainty; negative where these stand before the point. */
function decimalsOf(uncertainty: number): number {
  return 1 - exponentOf(uncertainty, 2);
}

/** Writes a number as a plain one where its exponent is moderate, else by `write` at a power of ten. */
function withPower(exponent: number, write: (power: number) => string): string {
  const isPlain = exponent >= PLAIN_EXPONENTS.least && exponent <= PLAIN_EXPONENTS.most;
  return isPlain ? write(0) : `${write(exponent)} × 10${superscript(exponent)}`;
}

/** Fixed decimals; negative ones round to tens, hundreds, ... */
function fixed(x: number, decimals: number): string {
  const rounded = decimals < 0 ? Math.round(x / 10 ** -decimals) * 10 ** -decimals : x;
  const [whole, fraction] = Math.abs(rounded)
    .toFixed(Math.min(100, Math.max(0, decimals)))
    .split('.');
  const grouped = whole!.replace(/\B(?=(\d{3})+$)/g, THIN_SPACE);
  const text = fraction === undefined ? grouped : `${grouped}.${fraction}`;
  return x < 0 && /[1-9]/.test(text) ? MINUS + text : text;
}

function superscript(n: number): string {
  const digits = '⁰¹²³⁴⁵⁶⁷⁸⁹';
  return (n < 0 ? '⁻' : '') + [...String(Math.abs(n))].map((d) => digits[Number(d)]).join('');
}
