import type { Quantity } from '../stages/matrix/quantity';

/** How things are looked at: kept while the window is open, no part of the study. */
export class Looks {
  quantity = $state<Quantity>('mean');
  log = $state(false);
  equal = $state(false);
  hatched = $state(false);
  profileLog = $state(false);
}
