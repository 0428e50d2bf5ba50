// What is being looked at, and who hears when it changes?

import type { Theme } from '../../src/results/colours.ts';

export type View = 'wave' | 'intensity' | 'phase';

export interface State {
  /** Id of the chosen mark; null when a field was chosen by itself. */
  readonly mark: string | null;
  /** Id of the field in the picture. */
  readonly field: string | null;
  /** Pump, loss or other parameter along the stored paths. */
  readonly level: number;
  readonly view: View;
  /** |u| at which the colours end; 1 shows the whole range. */
  readonly limit: number;
  /** ωt, radians in [0, 2π). */
  readonly phase: number;
  readonly playing: boolean;
  /** Pace of the dial against the usual one. */
  readonly speed: number;
  readonly theme: Theme;
}

export interface Store {
  readonly get: () => State;
  readonly set: (change: Partial<State>) => void;
  /** Calls `react` now, and again whenever one of the keys has changed. */
  readonly on: (keys: readonly (keyof State)[], react: (state: State) => void) => void;
}

export function createStore(initial: State): Store {
  let state = initial;
  const listeners: { keys: readonly (keyof State)[]; react: (state: State) => void }[] = [];
  return {
    get: () => state,
    set(change) {
      const before = state;
      state = { ...state, ...change };
      const changed = (Object.keys(change) as (keyof State)[]).filter((key) => before[key] !== state[key]);
      if (changed.length === 0) return;
      for (const { keys, react } of listeners) if (keys.some((key) => changed.includes(key))) react(state);
    },
    on(keys, react) {
      listeners.push({ keys, react });
      react(state);
    },
  };
}
