/** A phrase of the engine set as a sentence: a capital at its head, a full stop at its end. */
export function sentence(phrase: string): string {
  if (phrase === '') return '';
  const text = phrase.charAt(0).toUpperCase() + phrase.slice(1);
  return /[.!?]$/.test(text) ? text : `${text}.`;
}
