// Which eigenvalues of a family that is nonlinear in k, with branch points on the real axis, lie in a wedge about it?

import { type Complex, complex, modulus, subtract } from '../numerics/complex.ts';
import { type ContourProblem, sampledInverse, searchContour } from './contour-search.ts';
import type { Inverse } from './problem.ts';

export interface BranchedProblem {
  readonly size: number;
  /** A(k) on the sheet that is analytic around the real k `from`, as far as the next branch points to either side. */
  factorize(k: Complex, from: number): Inverse;
}

/** Several families with the same branch points: what a contour needs of them on the sheet around the real k `from`. */
export type BranchedFamilies = (from: number) => ContourProblem;

export interface ContourWindowRequest {
  readonly kMin: number;
  readonly kMax: number;
  /** Largest |Im k| / Re k. */
  readonly slope: number;
  /** Real k where A has branch points, such as cutoffs of guides. */
  readonly branchPoints: readonly number[];
  /** Eigenvalues to be expected between two real k. */
  readonly expected: (a: number, b: number) => number;
  readonly seed: number;
  readonly progress?: (done: number) => void;
}

export interface ContourWindowAnswer {
  readonly ks: readonly Complex[];
  /** Of each family. */
  readonly families: readonly (readonly Complex[])[];
  /** False when some part could not be told: too many eigenvalues in too little room, or a branch point within. */
  readonly covered: boolean;
  readonly contours: number;
}

/** A box in the plane of k: the ellipse through its corners is its contour. */
interface Box {
  readonly left: number;
  readonly right: number;
  readonly low: number;
  readonly high: number;
}

/** Points and columns of one contour; columns bound the eigenvalues that one contour can tell. */
const POINTS = 28;
export const COLUMNS = 16;
/** Most eigenvalues expected in one box. */
const PER_BOX = 5;
/** Slimmest box, either way: the trapezoid error of an ellipse is exp(−points × atanh(aspect)). */
const SLIMMEST = 0.5;
/** A branch point nearer than so many times the ellipse spoils its sum. */
const CLEAR_OF_BRANCH = 1.15;
/** Boxes below this share of k are not cut again; what they hold (a branch point) is left. */
const SMALLEST = 2e-3;
/** No search takes more contours. */
const MOST_CONTOURS = 600;
/** Boxes reach this share of themselves over their sides, so that nothing falls between two. */
const OVERLAP = 0.02;
/** Candidates nearer than this share of k are one. */
const SAME = 1e-6;

/** The eigenvalues of one family; see `searchWedges`. */
export const searchWedge = (problem: BranchedProblem, request: ContourWindowRequest): ContourWindowAnswer => {
  const columns = Math.min(COLUMNS, problem.size);
  return searchWedges(
    (from) => sampledInverse(problem.size, columns, request.seed, (k) => problem.factorize(k, from)),
    request,
  );
};

/**
 * The wedge is cut at the branch points, each part into boxes until their ellipses tell all they hold: cut boxes get
 * smaller in both directions, so that the search ends. Candidates are to be polished by the caller.
 */
export function searchWedges(problem: BranchedFamilies, request: ContourWindowRequest): ContourWindowAnswer {
  const { kMin, kMax, slope, expected, progress } = request;
  const branches = [...new Set(request.branchPoints)].sort((a, b) => a - b);
  const inside = branches.filter((c) => c > kMin && c < kMax);
  const families: Complex[][] = [];
  let covered = true;
  let contours = 0;
  const visit = (box: Box, sampled: ContourProblem): void => {
    const { left, right, low, high } = box;
    const width = right - left;
    const height = high - low;
    const cut = (): void => {
      const [x, y] = [(left + right) / 2, (low + high) / 2];
      if (height > width)
        for (const part of [
          { low, high: y },
          { low: y, high },
        ])
          visit({ ...box, ...part }, sampled);
      else
        for (const part of [
          { left, right: x },
          { left: x, right },
        ])
          visit({ ...box, ...part }, sampled);
    };
    if (Math.min(width, height) < SLIMMEST * Math.max(width, height)) return cut();
    const small = Math.max(width, height) < SMALLEST * right;
    if (!small && expected(left, right) > PER_BOX) return cut();
    const ellipse = ellipseAbout(box);
    const branched = branches.some((c) => radiusIn(ellipse, complex(c)) < CLEAR_OF_BRANCH);
    if ((branched && small) || contours >= MOST_CONTOURS) {
      covered = false;
      return;
    }
    if (branched) return cut();
    contours++;
    const answers = searchContour(sampled, { ...ellipse, points: POINTS });
    if (answers.some(({ told }) => !told)) {
      if (!small) return cut();
      covered = false;
    }
    answers.forEach((answer, f) => {
      const ks = (families[f] ??= []);
      for (const k of answer.ks) if (isIn(box, k) && !ks.some((other) => near(other, k))) ks.push(k);
    });
    progress?.((left - kMin) / (kMax - kMin));
  };
  const ends = [kMin, ...inside, kMax];
  for (let i = 0; i + 1 < ends.length; i++) {
    const [left, right] = [ends[i], ends[i + 1]];
    if (!(right > left)) continue;
    const from = (left + right) / 2;
    visit({ left, right, low: -slope * right, high: slope * right }, problem(from));
  }
  return { ks: families[0] ?? [], families, covered, contours };
}

interface Ellipse {
  readonly center: Complex;
  readonly halfWidth: number;
  readonly halfHeight: number;
}

const ellipseAbout = ({ left, right, low, high }: Box): Ellipse => ({
  center: complex((left + right) / 2, (low + high) / 2),
  halfWidth: (Math.SQRT1_2 + OVERLAP) * (right - left),
  halfHeight: (Math.SQRT1_2 + OVERLAP) * (high - low),
});

/** Below 1 inside. */
const radiusIn = ({ center, halfWidth, halfHeight }: Ellipse, k: Complex): number =>
  Math.hypot((k.re - center.re) / halfWidth, (k.im - center.im) / halfHeight);

const isIn = ({ left, right, low, high }: Box, { re, im }: Complex): boolean =>
  Math.abs(2 * re - left - right) <= (1 + 2 * OVERLAP) * (right - left) &&
  Math.abs(2 * im - low - high) <= (1 + 2 * OVERLAP) * (high - low);

const near = (a: Complex, b: Complex): boolean => modulus(subtract(a, b)) <= SAME * modulus(a);
