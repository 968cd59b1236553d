import { parentPort } from 'node:worker_threads';
import { InputError } from '../../src/study/input-error';
import type { Answer, Calls } from '../pool';

/** A worker's functions, one a call of its table. `note` sends progress; `moved` lists buffers to hand over, not copy. */
export type Handlers<C extends Calls> = {
  [N in keyof C]: (
    argument: C[N]['argument'],
    note: (note: unknown) => void,
  ) => Promise<Handled<C[N]['result']>> | Handled<C[N]['result']>;
};

export interface Handled<R> {
  result: R;
  moved?: ArrayBuffer[];
}

/** Answers the calls of a `Pool` with `handlers`, until the pool stops this worker. */
export function serve<C extends Calls>(handlers: Handlers<C>): void {
  const port = parentPort!;
  const post = (answer: Answer, moved: ArrayBuffer[] = []): void => port.postMessage(answer, moved);
  port.on('message', async ({ id, name, argument }: { id: number; name: keyof C; argument: never }) => {
    try {
      const { result, moved } = await handlers[name]!(argument, (note) => post({ id, note }));
      post({ id, done: result }, moved);
    } catch (error) {
      post({ id, fault: plainFault(error) });
    }
  });
}

function plainFault(error: unknown): Extract<Answer, { fault: unknown }>['fault'] {
  if (error instanceof InputError) return { where: error.where, what: error.what, remedy: error.remedy };
  const { message, stack } = error as Error;
  return stack === undefined ? { what: message } : { what: message, stack };
}
