// wavewell demo: how does the whole job go, on a device that comes with the program?

import type { Command } from 'commander';
import { readdirSync } from 'node:fs';
import { basename, join } from 'node:path';
import { DEFAULT_Q_MIN, deviceFigure, nearestName } from '../src/index.ts';
import { answerCode, printStory, quoted } from './answer.ts';
import { ask, type Asked, type Place, shown } from './ask.ts';
import { type DeviceFile, openDevice } from './device-file.ts';
import { NOT_FOUND } from './exit-codes.ts';
import { exportFiles, readFirstFile } from './export.ts';
import { InputError } from './faults.ts';
import { ink, say, sayCautions, sayFacts } from './paper.ts';
import { pictureFiles } from './pictures.ts';
import { alongSettings, commonSettings } from './settings.ts';
import type { Settings } from './tasks.ts';
import { packageFolder } from './version.ts';
import { writeFiles } from './write-files.ts';

const DEFAULT_DEVICE = 'dented-disk';

export function addDemo(program: Command): void {
  program
    .command('demo')
    .description('the whole job on a device that comes with the program: modes, threshold, absorbing twin, proof')
    .argument('[DEVICE]', `one of ${demoNames().join(', ')}`, DEFAULT_DEVICE)
    .option('--out <DIR>', 'folder for the runs (runs if absent)')
    .option('--again', 'computes anew although stored runs have the answers')
    .action(runDemo);
}

const demoFolder = (): string => join(packageFolder(), 'meshes-demo');
const demoNames = (): string[] =>
  readdirSync(demoFolder())
    .filter((name) => name.endsWith('.yaml'))
    .map((name) => basename(name, '.yaml'))
    .sort();

async function runDemo(name: string, options: { out?: string; again?: true }): Promise<void> {
  const names = demoNames();
  if (!names.includes(name))
    throw new InputError(
      'wavewell demo',
      name,
      `one of ${names.join(', ')}`,
      `write ${nearestName(name, names) ?? DEFAULT_DEVICE}`,
    );
  const file = openDevice(shown(join(demoFolder(), `${name}.yaml`)), {});
  const place = { base: options.out ?? 'runs', ...(options.again ? { again: true } : {}) };
  const settings = commonSettings({});
  let code = 0;
  const tell = (title: string, asked: Asked): void => {
    say(ink.dim(`── ${title}`));
    printStory(asked);
    code = Math.max(code, answerCode(asked.run.record));
    say();
  };
  const story = { name, file, place, settings, tell };
  await (name in JUNCTIONS ? junctionStory(story) : laserStory(story));
  process.exitCode = code === 0 ? 0 : NOT_FOUND;
}

interface Story {
  readonly name: string;
  readonly file: DeviceFile;
  readonly place: Place & { readonly base: string };
  readonly settings: Settings;
  readonly tell: (title: string, asked: Asked) => void;
}

async function laserStory({ name, file, place, settings, tell }: Story): Promise<void> {
  const modes = (await ask('modes', file, { ...settings, assignment: 'poles', qMin: DEFAULT_Q_MIN }, place))!;
  tell('1. Where does it resonate?', modes);
  // On two cores these two take the time of one.
  const [threshold, absorb] = await Promise.all(
    (['threshold', 'absorb'] as const).map(
      async (command) => (await ask(command, file, { ...settings, levelMax: null, along: null }, place))!,
    ),
  );
  tell('2. When does it lase?', threshold);
  tell('3. Which loss and which wave make it absorb everything?', absorb);

  const out = join(place.base, name, 'story');
  const files = { ...pictureFiles(out, 'device', deviceFigure(file.device)) };
  for (const { run } of [modes, threshold, absorb]) {
    const folder = join(out, run.record.command);
    const [field] = run.record.fields;
    Object.assign(files, exportFiles(run, folder, {}), readFirstFile(run, folder));
    if (field) Object.assign(files, exportFiles(run, folder, { field: field.id, nodes: true, picture: true }));
  }
  writeFiles(files);
  say(ink.dim('── 4. Take it away'));
  say(ink.bold(`Tables (CSV) and pictures (SVG, PNG) are in ${shown(out)}.`));
  for (const path of Object.keys(files).filter((f) => /\.(csv|png)$/.test(f))) say(`  ${shown(path)}`);
  say();
  sayFacts([
    ['see it lase', `npx wavewell view ${quoted(threshold.folder)}`],
    ['see its twin', `npx wavewell view ${quoted(absorb.folder)}`],
  ]);
  const cautions = [...new Set([threshold, absorb].flatMap(({ run }) => run.record.cautions))];
  // One that another holds within it needs no line of its own.
  sayCautions(cautions.filter((c) => !cautions.some((other) => other !== c && other.includes(c))));
}

/** Devices with guides: what comes in, and the knob that is trimmed. */
const JUNCTIONS: Readonly<Record<string, { readonly inputs: readonly string[]; readonly knob: string }>> = {
  'six-guide-star': { inputs: ['a', 'd', 'f'], knob: 'trim' },
};

async function junctionStory({ name, file, place, settings, tell }: Story): Promise<void> {
  const { inputs, knob } = JUNCTIONS[name];
  const qMin = DEFAULT_Q_MIN;
  const every = (await ask('match', file, { ...settings, qMin, everyChoice: true }, place))!;
  tell('1. Which inputs could be freed of reflection?', every);
  const along = alongSettings({ knob, range: null }, file);
  const match = await ask('match', file, { ...settings, inputs, sense: 'loss', qMin, levelMax: null, along }, place);
  if (!match) throw new Error(`no value of ${knob} frees ${inputs.join(', ')} of reflection`);
  tell(`2. Which ${knob} does it for ${inputs.join(', ')}, and where does the power go?`, match);
  const out = join(place.base, name, 'story');
  const [field] = match.run.record.fields;
  const files = {
    ...pictureFiles(out, 'device', deviceFigure(file.device)),
    ...exportFiles(match.run, join(out, 'match'), { field: field.id, nodes: true, picture: true }),
    ...readFirstFile(match.run, join(out, 'match')),
  };
  writeFiles(files);
  say(ink.dim('── 3. Take it away'));
  say(ink.bold(`Pictures (SVG, PNG) and the field (CSV) are in ${shown(out)}.`));
  for (const path of Object.keys(files).filter((f) => /\.(csv|png)$/.test(f))) say(`  ${shown(path)}`);
  say();
  sayFacts([['see the waves', `npx wavewell view ${quoted(match.folder)}`]]);
  sayCautions(match.run.record.cautions);
}
