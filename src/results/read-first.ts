// What does the READ-FIRST.txt beside exported tables say?

import { cautionsFor, type CautionKind } from './cautions.ts';
import { lengthText } from './export-field-csv.ts';
import type { RunRecord } from './format.ts';

export const READ_FIRST_NAME = 'READ-FIRST.txt';

/** CSV holds no comments: this text says what the tables are, in which units and signs, and carries the cautions. */
export function readFirstText(record: RunRecord): string {
  const { device } = record;
  const cautions = record.cautions.length > 0 ? record.cautions : cautionsFor(kindOf(record.command), device);
  const lines = [
    'READ FIRST',
    '',
    `${device.title} (${device.file}), wavewell ${record.command}, version ${record.program.version}`,
    record.sentence,
    '',
    'CAUTIONS',
    ...cautions.map((c) => `* ${c}`),
    '',
    'WHAT THE NUMBERS MEAN',
    ...meaning(record).map((m) => `* ${m}`),
    '',
  ];
  return lines.join('\r\n');
}

function meaning(record: RunRecord): string[] {
  const length = lengthText(record);
  const u = record.device.polarization;
  return [
    length === ''
      ? 'Lengths have no unit; k is the vacuum wavenumber per length unit of the device.'
      : `Lengths are in ${length}, k is the vacuum wavenumber in 1/${length}.`,
    `Time runs as exp(-i w t): loss is Im permittivity > 0, poles of a passive device have Im k < 0. The field is ${u}, out of the plane.`,
    'Columns named "engineers" use exp(+j w t): phases change their sign, and the multipole of index m stands at index -m.',
    'Drive amplitudes belong to the incoming waves H2_m(n k r) exp(i m phi) around the center of the rim, total power 1; 0 dB is that total.',
    `The field of a mode is fixed up to one complex factor ("arbitrary"); a driven field is counted per unit drive.`,
    'D is the pump or loss: active permittivity is e - i D w when pumped, e + i D w when absorbing, w the weight of the body.',
    'Power coefficients are those of intensity, not of amplitude.',
    'Phases are in degrees. An empty cell means: not known, not defined or not finite. Text that begins like a formula has an apostrophe in front.',
  ];
}

/** Commands without a caution of their own get those of a drive, the longest list. */
function kindOf(command: string): CautionKind {
  return command === 'modes' || command === 'threshold' || command === 'absorb' ? command : 'drive';
}
