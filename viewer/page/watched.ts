// What may be looked at from outside the page, by its tests and by the curious?

import type { Picture } from './picture.ts';
import type { Readout } from './readout.ts';
import type { State } from './state.ts';

export interface Watched {
  /** The chosen field is in the picture. */
  readonly ready: () => boolean;
  readonly state: () => State;
  readonly set: (change: Partial<State>) => void;
  readonly sample: Picture['sample'];
  readonly toPixel: Picture['toPixel'];
  readonly toDevice: Picture['toDevice'];
  readonly readout: Readout['shown'];
}

declare global {
  interface Window {
    wavewell?: Watched;
  }
}
