import type { StudyInput } from '../../src/study/study';
import type { Job } from '../session/jobs';
import type { Progress } from '../progress';
import type { Desk, Handlers } from './handlers';
import { atTally } from './matrix-calls';

type AuditCall = 'influence' | 'plan' | 'priorSensitivity' | 'rehearse' | 'compare' | 'replicasNeeded';

/** The deeper audit: what a reviewer asks of a matrix. */
export function auditCalls(desk: Desk): Handlers<AuditCall> {
  const at = (study: StudyInput, folder: string) => atTally(desk, study, folder);
  return {
    influence: async ({ study, folder }) => {
      const { tally, argument } = await at(study, folder);
      return desk.audits.ask(tally, 'influence', argument);
    },
    plan: async ({ study, folder, target }) => {
      const { tally, argument } = await at(study, folder);
      return desk.audits.ask(tally, 'plan', { ...argument, target });
    },
    priorSensitivity: ({ study, folder, job }) =>
      desk.jobs.run(job, async ({ signal }) => {
        const { tally, argument } = await at(study, folder);
        return desk.long.ask(tally, 'priorSensitivity', argument, { signal });
      }),
    rehearse: ({ study, folder, repetitions, job }) =>
      desk.jobs.run(job, async (running) => {
        const { tally, argument } = await at(study, folder);
        return desk.long.ask(tally, 'rehearse', { ...argument, repetitions }, steps(running, 'rehearsing'));
      }),
    compare: ({ study, folder, bundle, job }) =>
      desk.jobs.run(job, async ({ signal }) => {
        const path = desk.chosen.mayReadBundle(bundle);
        const { tally, argument } = await at(study, folder);
        return desk.long.ask(tally, 'compare', { ...argument, bundle: path }, { signal });
      }),
    replicasNeeded: ({ study, folder, digits, job }) =>
      desk.jobs.run(job, async (running) => {
        const { tally, argument } = await at(study, folder);
        return desk.long.ask(tally, 'replicasNeeded', { ...argument, digits }, steps(running, 'drawing'));
      }),
  };
}

/** Progress of work in the matrix worker, told in steps. */
function steps({ signal, progress }: Job, stage: Progress['stage']) {
  const onNote = (note: unknown): void =>
    progress({ stage, unit: 'steps', ...(note as { done: number; total: number }) });
  return { signal, onNote };
}
