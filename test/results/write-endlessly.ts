// A process that writes one run over another until it is killed; store.test.ts starts it.

import { writeRun } from '../../src/results/store.ts';
import { syntheticRun } from './synthetic-run.ts';

const folder = process.argv[2];
const runs = [
  syntheticRun('absorb', { rings: 30, sectors: 60, many: 3 }),
  syntheticRun('modes', { rings: 20, sectors: 60, many: 3 }),
];
for (let i = 0; ; i++) {
  const { record, arrays } = runs[i % 2];
  writeRun(folder, record, arrays, { 'device.yaml': `# ${i}\n` });
  if (i === 0) process.stdout.write('written\n');
}
