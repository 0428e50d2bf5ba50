// What does the thread beside the command compute?

import { availableParallelism, totalmem } from 'node:os';
import { parentPort, workerData } from 'node:worker_threads';
import {
  absorbRecord,
  choicesRecord,
  DEFAULT_Q_MIN,
  type Device,
  deviceSize,
  findAbsorption,
  findChoices,
  findKnobCrossings,
  findKnobMatches,
  findMatches,
  inputsOf,
  knobMatchRecord,
  matchRecord,
  findModes,
  findScattering,
  findSpectrum,
  modelledRecord,
  spectrumRecord,
  findThresholds,
  knobRecord,
  type Limits,
  measureMesh,
  modesRecord,
  prepare,
  type Progress,
  readDevice,
  resolutionFor,
  startThreads,
  thresholdRecord,
} from '../src/index.ts';
import { reportFault } from './faults.ts';
import type { FarMessage, FarTask, MeshInput, MeshOutput, RunInput, RunOutput, Settings } from './tasks.ts';

/** Milliseconds between two reports. */
const PACE = 50;

const tell = (message: FarMessage, moved: ArrayBuffer[] = []): void => parentPort!.postMessage(message, moved);

let told = -Infinity;
const progress: Progress = (stage, done) => {
  const now = performance.now();
  if (done > 0 && now - told < PACE) return;
  told = now;
  tell({ kind: 'progress', stage, done });
};

/** Share of the machine's memory that refinement may use when nothing else is said. */
const SHARE_OF_MEMORY = 0.75;

const GIB = 2 ** 30;

function limitsOf({ mostMemory, mostTime = Infinity }: Settings): Limits {
  const end = performance.now() + 1000 * mostTime;
  return {
    bytes: mostMemory === undefined ? SHARE_OF_MEMORY * totalmem() : mostMemory * GIB,
    outOfTime: () => performance.now() > end,
  };
}

/** Up to so many points a spectrum is solved in full at each; beyond, by a projected model. */
const MOST_FULL = 24;

function computeRun(input: RunInput): RunOutput {
  const { command, text, context, read } = input;
  const device = readDevice(text, context.deviceFile, read);
  const { digits, assignment, qMin, levelMax, along } = input.settings;
  const limits = limitsOf(input.settings);
  if (command === 'modes')
    return modesRecord(
      device,
      findModes(device, { digits, qMin: qMin!, assignment: assignment!, limits, progress }),
      context,
    );
  if (command === 'spectrum') {
    const { kMin, kMax } = device.band;
    const { points, full, multipoles, inputs } = input.settings;
    const n = points!;
    const ks = Array.from({ length: n }, (_, i) => (n === 1 ? kMin : kMin + ((kMax - kMin) * i) / (n - 1)));
    const request = { digits, progress, ...(multipoles === undefined ? {} : { multipoles }) };
    if (full || n <= MOST_FULL) {
      const each = ks.map((re) => ({ re, im: 0 }));
      return spectrumRecord(device, findScattering(device, each, request), context);
    }
    return modelledRecord(device, findSpectrum(device, ks, { ...request, ...(inputs ? { inputs } : {}) }), context);
  }
  if (command === 'match') {
    const { inputs = [], sense = 'loss' } = input.settings;
    if (input.settings.everyChoice)
      return choicesRecord(device, findChoices(device, { digits, qMin: qMin!, progress }), context);
    const request = { inputs, sense, digits, ...(qMin === undefined ? {} : { qMin }), progress };
    if (!along) {
      const most = levelMax === null || levelMax === undefined ? {} : { levelMax };
      return matchRecord(device, findMatches(device, { ...request, ...most }), sense, context);
    }
    const at = (value: number): Device =>
      readDevice(text, context.deviceFile, { ...read, knobs: { ...read.knobs, [along.knob]: value } });
    const found = findKnobMatches(at, { ...request, range: along.range });
    return found.length === 0
      ? null
      : knobMatchRecord(device, along.knob, found, inputsOf(found[0].openings, inputs), context);
  }
  if (along) {
    const { knob, range } = along;
    const at = (value: number): Device =>
      readDevice(text, context.deviceFile, { ...read, knobs: { ...read.knobs, [knob]: value } });
    const side = command === 'threshold' ? 'poles' : 'zeros';
    const found = findKnobCrossings(at, { digits, assignment: side, range, limits, progress });
    return found.length === 0
      ? null
      : knobRecord(device, knob, found, command === 'threshold' ? 'gain' : 'loss', context);
  }
  const request = { digits, limits, progress, ...(levelMax === null || levelMax === undefined ? {} : { levelMax }) };
  return command === 'threshold'
    ? thresholdRecord(device, findThresholds(device, request), context)
    : absorbRecord(device, findAbsorption(device, request), context);
}

/** Larger devices than this are worth the time that threads take to start, in unknowns. */
const WORTH_THREADS = 3000;

async function useProcessors({ text, context, read }: RunInput): Promise<void> {
  const { unknowns } = deviceSize(readDevice(text, context.deviceFile, read));
  const processors = Math.min(16, availableParallelism());
  if (unknowns > WORTH_THREADS && processors > 1) await startThreads(processors);
}

function computeMesh({ text, file, read, digits }: MeshInput): MeshOutput {
  const device = readDevice(text, file, read);
  const resolution = resolutionFor(digits);
  progress('meshing', 0);
  const { kMin, kMax } = device.band;
  const { mesh, notes } = prepare(device, { kMin, kMax, slope: 1 / (2 * DEFAULT_Q_MIN) }, resolution);
  return { mesh, notes, quality: measureMesh(mesh), order: resolution.order };
}

const { task, input } = workerData as FarTask;
try {
  if (task === 'run') await useProcessors(input as RunInput);
  const output = task === 'mesh' ? computeMesh(input as MeshInput) : computeRun(input as RunInput);
  const moved =
    output !== null && 'arrays' in output ? Object.values(output.arrays).map((a) => a.buffer as ArrayBuffer) : [];
  tell({ kind: 'done', output }, [...new Set(moved)]);
} catch (error) {
  tell({ kind: 'fault', report: reportFault(error) });
}
