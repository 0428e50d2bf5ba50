// Does an answer hold every mode of its window?

import type { LayerPlan } from '../boundary/stretched-layer.ts';
import { type Device, isWalled } from '../device/model.ts';
import { judgeAll, provenWindow, type WindowProof } from '../eigen/proven-window.ts';
import type { EigenGroup } from '../eigen/rayleigh.ts';
import { type modesInWindow, type Tile, type Wedge, wedgeHolds, type WindowRequest } from '../eigen/window.ts';
import { argument, type Complex, modulus, subtract } from '../numerics/complex.ts';
import { closeByChannels } from '../operator/channel-boundary.ts';
import type { DeviceFamily } from '../operator/device-family.ts';
import { checkLayer, LAYER_MODE_SENSITIVITY } from './layer-check.ts';

/** How many modes were found, and how many the count knows of; members of a group one by one. */
export interface Completeness {
  readonly found: number;
  readonly counted: number;
  /** The count is settled and equals what was found. */
  readonly proven: boolean;
  /** Why it is not proven, else "". */
  readonly reason: string;
  /** Factorizations spent on the count. */
  readonly factorizations: number;
}

/** A search that counts, and what it has counted. */
export interface CountedSearch {
  /** `find` replaces the first search, where that is done. */
  search(
    family: DeviceFamily,
    request: WindowRequest & { readonly find?: typeof modesInWindow },
  ): { readonly tiles: readonly Tile[]; readonly covered: boolean };
  /** Every mode seen in the window or near it, one number a member. */
  known(): readonly Complex[];
  /** Judges the final list of a window by the factorizations of the search. */
  judge(wedge: Wedge, modes: readonly { readonly k: Complex; readonly multiplicity: number }[]): Completeness;
}

export interface CountChoice {
  /** Twice the points that settle a contour. */
  readonly doubled?: boolean;
  /** The family whose determinant counts, of lower order perhaps; the one searched if absent. */
  readonly countOn?: DeviceFamily;
}

/**
 * `modesInWindow` with a count by the determinant of the device closed exactly on the rim: it knows nothing of the
 * stretched layer that the search works with, nor of its modes. `groupWidth` is relative to k.
 */
export function countedSearch(
  device: Device,
  layer: LayerPlan,
  groupWidth: number,
  { doubled = false, countOn }: CountChoice = {},
): CountedSearch {
  let proof: WindowProof | null = null;
  return {
    search(family, request) {
      const { kMax, low, high } = request.wedge;
      const index = Math.sqrt(device.background.permittivity * device.background.permeability);
      // contours reach a little beyond the window
      const top = 1.15 * kMax * Math.hypot(1, Math.max(low, high));
      // a cavity without openings is its own determinant
      const closed = isWalled(device)
        ? { logDeterminant: (k: Complex, level: number) => determinantOf(countOn ?? family, k, level) }
        : closeByChannels(device, countOn ?? family, highestChannel(index * top * layer.rimRadius));
      const foreign = new WeakMap<EigenGroup, boolean>();
      const isForeign = (group: EigenGroup): boolean => {
        let known = foreign.get(group);
        if (known === undefined) {
          known =
            Math.abs(argument(group.k)) > STEEP &&
            checkLayer(family, layer, group.k, request.level, group.vectors, group.multiplicity).sensitivity >
              LAYER_MODE_SENSITIVITY;
          foreign.set(group, known);
        }
        return known;
      };
      const { direction } = family.operator;
      const answer = provenWindow(family, {
        ...request,
        groupWidth: groupWidth * kMax,
        logDeterminant: (k) => closed.logDeterminant(k, request.level, () => direction),
        isForeign,
        doubled,
      });
      proof = answer.proof;
      // what shows nothing in the window or near it need not climb
      const near = widened(request.wedge);
      return { ...answer, tiles: answer.tiles.filter((t) => t.ks.some((k) => wedgeHolds(near, k))) };
    },
    known: () => proof?.known ?? [],
    judge(wedge, modes) {
      if (!proof) throw new Error('judged before the search; expected search() first');
      return judgeFinal(proof, wedge, modes);
    },
  };
}

function determinantOf(family: DeviceFamily, k: Complex, level: number): Complex {
  const factor = family.factorize(k, level);
  factor.release();
  return factor.logDeterminant;
}

/**
 * Whether the count knows the device: not yet where guides or symmetry lines cut the rim. (A guide's channels have branch
 * points at their cutoffs.)
 */
export const isCountable = (device: Device): boolean => (device.guides ?? []).length === 0 && !device.symmetry;

/** Channels |m| that tell modes in a count: beyond the turning point they fall off at once. */
const highestChannel = (x: number): number => Math.ceil(x + 4 * Math.cbrt(x)) + 6;

/** Modes of the layer lie below this argument, radians: above it none is looked for. */
const STEEP = 0.5;

/** From the order of the search to the last no mode moves farther, relative; measured 1e-3 for the lowest digits. */
const EDGE = 3e-3;

/** A mode of the answer and the same mode in the search are closer than this, relative. */
const SAME = 0.02;

/**
 * The contours judge the answer's modes together with the modes near the window that only the search has seen. One of
 * those inside the window has been lost on the way: left out, it shows as missing.
 */
function judgeFinal(
  proof: WindowProof,
  wedge: Wedge,
  modes: readonly { readonly k: Complex; readonly multiplicity: number }[],
): Completeness {
  const final = modes.flatMap(({ k, multiplicity }) => Array.from({ length: multiplicity }, () => k));
  const rest = [...proof.known];
  for (const k of final) {
    const i = nearest(rest, k);
    if (i >= 0 && modulus(subtract(rest[i], k)) <= SAME * modulus(k)) rest.splice(i, 1);
  }
  const inside = shrunk(wedge);
  const beside = rest.filter((k) => !wedgeHolds(inside, k));
  const lost = rest.filter((k) => wedgeHolds(inside, k));
  const { proven, missing, surplus, deviation, points } = judgeAll(proof, [...final, ...beside]);
  const found = final.length;
  const common = { found, factorizations: points };
  if (proven) return { ...common, counted: found, proven, reason: '' };
  if (surplus > 0) {
    return {
      ...common,
      counted: found - surplus,
      proven,
      reason: `the list holds ${surplus} more than the count finds`,
    };
  }
  const places = missing.length > 0 ? missing : lost;
  if (places.length > 0) {
    const [k] = places;
    const where = `${k.re.toPrecision(6)} ${k.im < 0 ? '−' : '+'} ${Math.abs(k.im).toPrecision(3)} i`;
    const reason = `the count finds ${places.length} more, the first near k = ${where}`;
    return { ...common, counted: found + places.length, proven, reason };
  }
  const reason = `the count is not settled: its phase is off by ${deviation.toPrecision(2)} rad with ${points} factorizations`;
  return { ...common, counted: found, proven, reason };
}

const widened = ({ kMin, kMax, low, high }: Wedge): Wedge => ({
  kMin: kMin * (1 - EDGE),
  kMax: kMax * (1 + EDGE),
  low: low + EDGE,
  high: high + EDGE,
});

const shrunk = ({ kMin, kMax, low, high }: Wedge): Wedge => ({
  kMin: kMin * (1 + EDGE),
  kMax: kMax * (1 - EDGE),
  low: low - EDGE,
  high: high - EDGE,
});

function nearest(list: readonly Complex[], k: Complex): number {
  let best = -1;
  let least = Infinity;
  list.forEach((other, i) => {
    const distance = modulus(subtract(other, k));
    if (distance < least) {
      least = distance;
      best = i;
    }
  });
  return best;
}
