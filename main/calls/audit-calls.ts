import type { Desk, Handlers } from './handlers';
import { atTally } from './matrix-calls';

/** The deeper audit: what a reviewer asks of a matrix. */
export function auditCalls(desk: Desk): Handlers<'influence'> {
  return {
    influence: async ({ study, folder }) => {
      const { tally, argument } = await atTally(desk, study, folder);
      return desk.matrix.ask(tally, 'influence', argument);
    },
  };
}
