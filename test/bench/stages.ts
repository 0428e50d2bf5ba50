// On which stages does a job spend its time?

import { Session, type Profiler } from 'node:inspector';

export const STAGES = [
  'mesh',
  'assembly',
  'analysis',
  'factorization',
  'solves',
  'products A x',
  'eigen algebra',
  'rest',
] as const;
export type Stage = (typeof STAGES)[number];

/** Files of src by the stage that their time belongs to; the innermost one on the stack that is listed decides. */
const OWNERS: readonly [RegExp, Stage][] = [
  [/\/src\/(mesh|geometry|boundary)\//, 'mesh'],
  [/\/src\/sparse\/(solve|substitute|refine)\./, 'solves'],
  [/\/src\/sparse\/(factorize|factors|front-work|threads|spare-panels|worker|worker-job)\./, 'factorization'],
  [/\/src\/sparse\/(analyse|dissection|bisection|incidence|fronts|memory-plan)\./, 'analysis'],
  [/\/src\/elements\//, 'assembly'],
  [/\/src\/eigen\//, 'eigen algebra'],
];

/**
 * Runs the work under the sampling profiler. Shares of the samples, which count wall time of this thread, are applied to
 * its processor seconds.
 */
export function timeStages<T>(work: () => T): { result: T; seconds: number; stages: Record<Stage, number> } {
  const session = new Session();
  session.connect();
  session.post('Profiler.enable');
  session.post('Profiler.setSamplingInterval', { interval: 500 });
  session.post('Profiler.start');
  const before = process.cpuUsage();
  const result = work();
  const { user, system } = process.cpuUsage(before);
  let profile: Profiler.Profile | undefined;
  session.post('Profiler.stop', (_, answer) => (profile = answer.profile));
  session.disconnect();
  const seconds = (user + system) / 1e6;
  const stages = sharesOf(profile as unknown as Profiler.Profile);
  for (const stage of STAGES) stages[stage] *= seconds;
  return { result, seconds, stages };
}

function sharesOf({ nodes, samples = [], timeDeltas = [] }: Profiler.Profile): Record<Stage, number> {
  const parent = new Map<number, number>();
  const byId = new Map(nodes.map((node) => [node.id, node]));
  for (const node of nodes) for (const child of node.children ?? []) parent.set(child, node.id);
  const known = new Map<number, Stage>();
  const stageOf = (id: number): Stage => {
    let stage = known.get(id);
    if (stage === undefined) {
      const { url, functionName } = (byId.get(id) as Profiler.ProfileNode).callFrame;
      // The operator builds its matrices (analysis has files of its own), fills elements and multiplies.
      if (/\/src\/operator\//.test(url)) {
        if (/fill/i.test(functionName)) stage = 'factorization';
        else if (/multiply|addLocal|put/.test(functionName)) stage = 'products A x';
      }
      stage ??= OWNERS.find(([files]) => files.test(url))?.[1];
      const above = parent.get(id);
      stage ??= above === undefined ? 'rest' : stageOf(above);
      known.set(id, stage);
    }
    return stage;
  };
  const sums = Object.fromEntries(STAGES.map((stage) => [stage, 0])) as Record<Stage, number>;
  let total = 0;
  samples.forEach((id, i) => {
    sums[stageOf(id)] += timeDeltas[i];
    total += timeDeltas[i];
  });
  for (const stage of STAGES) sums[stage] /= total || 1;
  return sums;
}
