import type { Cut } from '../../../src/study/study';

export const OPERATORS: readonly { is: Cut['is']; text: string }[] = [
  { is: '>=', text: '≥' },
  { is: '>', text: '>' },
  { is: '<=', text: '≤' },
  { is: '<', text: '<' },
  { is: '=', text: '=' },
  { is: '!=', text: '≠' },
  { is: 'in', text: 'in' },
];

/** What a person typed, as the study wants it: a number where it reads as one, a list for "in". */
export function parseCutValue(text: string, is: Cut['is']): Cut['value'] {
  if (is !== 'in') return scalar(text);
  const parts = text.split(',').map((part) => part.trim());
  const values = parts.filter((part) => part !== '').map(scalar);
  return values.length > 0 ? values : [''];
}

export function showCutValue(value: Cut['value']): string {
  return Array.isArray(value) ? value.join(', ') : String(value);
}

function scalar(text: string): number | string {
  const trimmed = text.trim().replace('\u2212', '-');
  const number = Number(trimmed);
  return trimmed !== '' && Number.isFinite(number) ? number : text.trim();
}
