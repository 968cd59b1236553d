import { InputError } from '../study/input-error';
import type { Need } from './batch';

/** Where the needed columns stand among `names`. Throws `InputError` for one that is absent or stands there twice. */
export function positionsOf(needs: readonly Need[], names: readonly string[], file: string): number[] {
  return needs.map(({ column }) => {
    const at = names.indexOf(column);
    if (at < 0) throw new InputError(file, `no column "${column}"`, `the columns are ${names.join(', ') || 'none'}`);
    const again = names.indexOf(column, at + 1);
    if (again < 0) return at;
    const what = `two columns are named "${column}", number ${at + 1} and number ${again + 1}`;
    throw new InputError(file, what, 'rename one of them');
  });
}
