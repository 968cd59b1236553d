import { formatLocale } from 'd3';

/** Characters of set numbers: a narrow space that does not break, a true minus, a multiplication sign. */
export const THIN = '\u202f';
export const MINUS = '\u2212';
export const TIMES = '\u00d7';
const NONE = '\u2013';

const locale = formatLocale({ decimal: '.', thousands: THIN, grouping: [3], currency: ['', ''], minus: MINUS });

/** Exponents of ten outside of this range are written as powers. */
const PLAIN_EXPONENTS = { least: -3, most: 5 };
const SUPERSCRIPTS = '\u2070\u00b9\u00b2\u00b3\u2074\u2075\u2076\u2077\u2078\u2079';

const whole = locale.format(',d');

/** A count: whole, in groups of three. A dash for what is not a number. */
export function count(value: number | null | undefined): string {
  return isFiniteNumber(value) ? whole(Math.round(value)) : NONE;
}

/** A value to `digits` significant digits, as a power of ten where it would be too long to read. */
export function value(x: number | null | undefined, digits = 4): string {
  if (!isFiniteNumber(x)) return NONE;
  if (x === 0) return '0';
  const rounded = Number(x.toPrecision(digits));
  const exponent = exponentOf(rounded);
  if (exponent < PLAIN_EXPONENTS.least || exponent > Math.max(PLAIN_EXPONENTS.most, digits - 1)) {
    return power(rounded, exponent, digits - 1);
  }
  return fixed(rounded, Math.max(0, digits - 1 - exponent));
}

/** An edge or an entered number: every digit it has, none it has not. */
export function exact(x: number): string {
  const text = String(x);
  if (text.includes('e')) return value(x, 15).replace(/\.?0+(?=\u202f?\u00d7|$)/, '');
  const [integer = '', fraction] = text.replace('-', '').split('.');
  const grouped = whole(Number(integer)) + (fraction === undefined ? '' : `.${fraction}`);
  return x < 0 ? MINUS + grouped : grouped;
}

/** The decimals that show `uncertainty` to two significant digits; negative where it reaches beyond the point. */
export function decimalsFor(uncertainty: number): number {
  if (!(uncertainty > 0) || !Number.isFinite(uncertainty)) return 3;
  return 1 - exponentOf(Number(uncertainty.toPrecision(2)));
}

/** `0.8731 ± 0.0058 MeV`: uncertainty to two significant digits, the value to match. */
export function plusMinus(x: number | null, sd: number | null, unit = ''): string {
  if (!isFiniteNumber(x)) return NONE;
  if (!isFiniteNumber(sd) || sd === 0) return withUnit(value(x), unit);
  const exponent = Math.max(exponentOf(x), exponentOf(sd));
  if (exponent < PLAIN_EXPONENTS.least || exponent > PLAIN_EXPONENTS.most) {
    const scale = 10 ** exponent;
    const decimals = decimalsFor(sd / scale);
    const inner = `(${fixed(x / scale, decimals)} \u00b1 ${fixed(sd / scale, decimals)})`;
    return withUnit(`${inner}${THIN}${TIMES}${THIN}10${superscript(exponent)}`, unit);
  }
  const decimals = decimalsFor(sd);
  const inner = `${fixed(x, decimals)} \u00b1 ${fixed(sd, decimals)}`;
  return withUnit(unit === '' ? inner : `(${inner})`, unit);
}

export interface Measured {
  value: number | null;
  lower: number | null;
  upper: number | null;
}

/** `0.873 (0.861 to 0.885)`: digits by the interval's half width, two of them. */
export function interval({ value: x, lower, upper }: Measured, unit = ''): string {
  if (!isFiniteNumber(x)) return NONE;
  if (!isFiniteNumber(lower) || !isFiniteNumber(upper) || upper === lower) return withUnit(value(x), unit);
  const digits = digitsWithin(x, lower, upper);
  return withUnit(`${digits(x)} (${digits(lower)} to ${digits(upper)})`, unit);
}

/** A formatter whose digits suit numbers inside `[lower, upper]`: two digits of the half width. */
function digitsWithin(x: number, lower: number, upper: number): (x: number) => string {
  const half = (upper - lower) / 2;
  const largest = Math.max(Math.abs(x), Math.abs(lower), Math.abs(upper));
  if (exponentOf(largest) < PLAIN_EXPONENTS.least) {
    return (y) => value(y, Math.max(2, exponentOf(y) - exponentOf(half) + 2));
  }
  return (y) => fixed(y, decimalsFor(half));
}

/** A cell's probability. One without events is only known from above: "no event, below 0.0031 at 95 %". */
export function probability(cell: Measured, events: number, credibility: number): string {
  if (events === 0) return `no event, below ${value(cell.upper, 2)} at ${percent(credibility)}`;
  return interval(cell);
}

/** A share of one as percent, with the digits that `digits` significant ones need: `62 %`, `99.95 %`. */
export function percent(share: number | null, digits = 3): string {
  if (!isFiniteNumber(share)) return NONE;
  const scaled = Number((share * 100).toPrecision(digits));
  return `${value(scaled, digits).replace(/\.0+$/, '')}${THIN}%`;
}

/** Bytes in decimal prefixes (IEC 80000-13: k = 1000). */
export function bytes(n: number): string {
  if (!isFiniteNumber(n)) return NONE;
  const prefixes = ['B', 'kB', 'MB', 'GB', 'TB'];
  const step = Math.min(prefixes.length - 1, n < 1000 ? 0 : Math.floor(Math.log10(n) / 3));
  const scaled = n / 1000 ** step;
  return `${step === 0 ? count(n) : fixed(scaled, scaled < 10 ? 1 : 0)}${THIN}${prefixes[step]}`;
}

const MINUTE = 60;
const HOUR = 3600;

/** A time span a person waits: `0.4 s`, `12 s`, `3 min 20 s`, `2 h 5 min`. */
export function duration(seconds: number): string {
  if (!isFiniteNumber(seconds)) return NONE;
  if (seconds < 10) return `${fixed(seconds, 1)}${THIN}s`;
  const s = Math.round(seconds);
  if (s < MINUTE) return `${s}${THIN}s`;
  if (s < HOUR) return `${Math.floor(s / MINUTE)}${THIN}min ${s % MINUTE}${THIN}s`;
  return `${Math.floor(s / HOUR)}${THIN}h ${Math.floor((s % HOUR) / MINUTE)}${THIN}min`;
}

/** A number and its unit, with a space that does not break; a percent sign is a unit too. */
export function withUnit(text: string, unit: string): string {
  return unit === '' ? text : `${text}${THIN}${unit}`;
}

/** `Photon energy, MeV`: the label of an axis. */
export function labelled(label: string, unit: string, fallback: string): string {
  const name = label === '' ? fallback : label;
  return unit === '' ? name : `${name}, ${unit}`;
}

/** "1 file", "3 files", with the count set as one. */
export function plural(n: number, one: string, many = `${one}s`): string {
  return `${count(n)} ${Math.round(n) === 1 ? one : many}`;
}

/** Text for a file or the clipboard: plain digits, so that another program reads it. */
export function plain(text: string): string {
  return text.replaceAll(THIN, ' ').replaceAll(MINUS, '-');
}

function power(x: number, exponent: number, decimals: number): string {
  const mantissa = fixed(x / 10 ** exponent, decimals);
  return `${mantissa}${THIN}${TIMES}${THIN}10${superscript(exponent)}`;
}

/** Whole powers of ten for the ticks of a log axis: `10\u207b\u00b3`. */
export function superscript(exponent: number): string {
  const digits = [...String(Math.abs(exponent))].map((d) => SUPERSCRIPTS[Number(d)]).join('');
  return exponent < 0 ? `\u207b${digits}` : digits;
}

function fixed(x: number, decimals: number): string {
  if (decimals < 0) {
    const step = 10 ** -decimals;
    return fixed(Math.round(x / step) * step, 0);
  }
  const text = locale.format(`,.${Math.min(decimals, 20)}f`)(x);
  // A rounded zero has no sign.
  return /[1-9]/.test(text) ? text : text.replace(MINUS, '');
}

function exponentOf(x: number): number {
  return x === 0 ? -Infinity : Number(x.toExponential().split('e')[1]);
}

function isFiniteNumber(x: number | null | undefined): x is number {
  return typeof x === 'number' && Number.isFinite(x);
}

/** A value as a reader wants it in passing: up to six significant digits, no more zeros than it has. */
export function tidy(x: number): string {
  const text = value(x, 6);
  return text.includes('.') && !text.includes(TIMES)
    ? text.replace(/\.?0+$/, '')
    : text.replace(/\.?0+(?=\u202f\u00d7)/, '');
}

/** A number as an input holds it: plain digits that read back to the same number. */
export function exactInput(x: number): string {
  return Number.isFinite(x) ? String(x) : '';
}
