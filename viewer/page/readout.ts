// What is the field's exact value under the cursor?

import type { RunRecord } from '../../src/results/format.ts';
import { html, rows } from './dom.ts';
import { fullFigure, unitName } from './numbers.ts';
import type { Store } from './state.ts';

/** What the server answers; see viewer/server/serve.ts. */
export type Probe =
  | { readonly inside: false }
  | {
      readonly inside: true;
      readonly re: number;
      readonly im: number;
      readonly modulus: number;
      readonly phase: number;
      readonly name: string;
    };

export interface Readout {
  /** The cursor is at this point of the device; null: it has left the picture. */
  readonly point: (at: readonly [x: number, y: number] | null) => void;
  /** Holds the read-out at a point; the same point again, or null, lets go. */
  readonly pin: (at: readonly [x: number, y: number] | null) => void;
  readonly pinned: () => readonly [x: number, y: number] | null;
  /** The point and value last shown. */
  readonly shown: () => { readonly x: number; readonly y: number; readonly probe: Probe } | null;
}

/** Milliseconds the cursor must rest before the server is asked. */
const REST = 45;

export function createReadout(host: HTMLElement, record: RunRecord, store: Store, changed: () => void): Readout {
  let pinned: readonly [number, number] | null = null;
  let wanted: readonly [number, number] | null = null;
  let shown: { x: number; y: number; probe: Probe } | null = null;
  let timer = 0;
  let asking = new AbortController();

  const show = (): void => {
    if (!shown || !wanted) {
      host.replaceChildren();
      return;
    }
    const { x, y, probe } = shown;
    const unit = unitName(record.device.lengthUnit);
    const part = record.device.polarization === 'Ez' ? 'Ez' : 'Hz';
    const place: [string, string][] = [
      [`x${unit && ` (${unit})`}`, fullFigure(x)],
      [`y${unit && ` (${unit})`}`, fullFigure(y)],
    ];
    const values: [string, string][] = probe.inside
      ? [
          [`Re ${part}`, fullFigure(probe.re)],
          [`Im ${part}`, fullFigure(probe.im)],
          [`|${part}|`, fullFigure(probe.modulus)],
          ['phase', `${fullFigure((probe.phase * 180) / Math.PI)}°`],
          ['body', probe.name],
        ]
      : [['', record.display.enclosed ? 'beyond the walls' : 'beyond the rim']];
    host.replaceChildren(
      html('h2', {}, pinned ? 'Pinned' : 'Under the cursor'),
      rows([...place, ...values]),
      ...(pinned ? [html('p', { class: 'soft' }, 'Click there again to let go.')] : []),
    );
  };

  const ask = async (): Promise<void> => {
    asking.abort();
    asking = new AbortController();
    const { field } = store.get();
    const at = wanted;
    if (!at || !field) return;
    const query = new URLSearchParams({ field, x: String(at[0]), y: String(at[1]) });
    try {
      const response = await fetch(`./probe?${query}`, { signal: asking.signal });
      if (!response.ok) return;
      shown = { x: at[0], y: at[1], probe: (await response.json()) as Probe };
      show();
    } catch (error) {
      if ((error as Error).name !== 'AbortError')
        host.replaceChildren(html('p', { class: 'soft' }, 'The server has gone.'));
    }
  };
  const askSoon = (): void => {
    clearTimeout(timer);
    timer = window.setTimeout(() => void ask(), REST);
  };
  store.on(['field'], () => {
    if (wanted) askSoon();
  });

  return {
    point(at) {
      if (pinned) return;
      wanted = at;
      if (at) askSoon();
      else {
        clearTimeout(timer);
        asking.abort();
        show();
      }
    },
    pin(at) {
      pinned = at;
      wanted = at;
      if (at) void ask();
      else show();
      changed();
    },
    pinned: () => pinned,
    shown: () => shown,
  };
}
