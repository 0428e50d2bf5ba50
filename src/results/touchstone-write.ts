// How do network parameters become the text of a Touchstone file?

import { pairOrder, type TouchstoneNetwork, toPair } from './touchstone.ts';

/** Pairs on a line of data. */
const MOST_PAIRS = 4;

/**
 * The file, lines ended by CR LF. Version 1: option line, then data; version 2: keywords around them. One- and two-ports
 * stand on one line a frequency, larger ones row by row, at most four pairs a line; a row begins a line. Numbers are the
 * shortest decimals that read back as the same double.
 *
 * @param comments put in front, each after "!"; characters that are not plain ASCII become "?".
 */
export function touchstoneText(network: TouchstoneNetwork, comments: readonly string[] = []): string {
  const { version, unit, parameter, format, ports, reference, frequencies, matrices } = network;
  const alike = reference.every((r) => r === reference[0]);
  const resistance = alike || version === 2 ? [reference[0]] : reference;
  const option = `# ${unit} ${parameter} ${format} R ${resistance.join(' ')}`;
  const lines = comments.map((text) => `! ${text.replaceAll(/[^\x20-\x7e]/g, '?')}`);
  if (version === 1) lines.push(option);
  else
    lines.push(
      '[Version] 2.0',
      option,
      `[Number of Ports] ${ports}`,
      ...(ports === 2 ? ['[Two-Port Data Order] 12_21'] : []),
      `[Number of Frequencies] ${frequencies.length}`,
      `[Reference] ${reference.join(' ')}`,
      '[Matrix Format] Full',
      '[Network Data]',
    );
  const order = pairOrder(ports, version === 1);
  const rowLength = ports <= 2 ? order.length : ports;
  for (let f = 0; f < frequencies.length; f++) {
    const at = 2 * ports * ports * f;
    const pairs = order.map(([i, j]) => {
      const e = at + 2 * (i + j * ports);
      return toPair(format, matrices[e], matrices[e + 1])
        .map(text)
        .join(' ');
    });
    for (let row = 0; row < pairs.length; row += rowLength)
      for (let first = row; first < row + rowLength; first += MOST_PAIRS) {
        const some = pairs.slice(first, Math.min(first + MOST_PAIRS, row + rowLength)).join(' ');
        lines.push(first === 0 ? `${text(frequencies[f])} ${some}` : `  ${some}`);
      }
  }
  if (network.noise.length > 0) {
    if (version === 2) {
      lines.splice(lines.indexOf('[Network Data]'), 0, `[Number of Noise Frequencies] ${network.noise.length}`);
      lines.push('[Noise Data]');
    }
    for (const row of network.noise) lines.push(row.map(text).join(' '));
  }
  if (version === 2) lines.push('[End]');
  return `${lines.join('\r\n')}\r\n`;
}

const text = (v: number): string => (Object.is(v, -0) ? '0' : String(v));
