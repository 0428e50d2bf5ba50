// Which modes are followed together, and where do they all go?

import { followCluster, type ModePath } from '../eigen/follow.ts';
import type { EigenProblem } from '../eigen/problem.ts';
import { type EigenGroup, gather } from '../eigen/rayleigh.ts';

/** Modes closer than this (relative) are followed together. */
const CLUSTER_WIDTH = 2e-3;

/** In dense spectra clusters are cut until they have no more members: one shift serves them all. */
const MOST_TOGETHER = 8;

export interface FollowAllRequest {
  readonly kMax: number;
  readonly levelMax: number;
  /** Absolute distance within which modes are one group. */
  readonly groupWidth: number;
  readonly progress?: (done: number) => void;
}

/** The paths of all groups from level 0 to the axis or to levelMax, followed in clusters. */
export function followAll(
  problem: EigenProblem,
  groups: readonly EigenGroup[],
  { kMax, levelMax, groupWidth, progress }: FollowAllRequest,
): ModePath[] {
  const clusters = clustersOf(groups, CLUSTER_WIDTH * kMax);
  return clusters.flatMap((list, i) => {
    const columns = list.reduce((sum, g) => sum + g.multiplicity, 0);
    const vectors = new Float64Array(2 * problem.size * columns);
    let at = 0;
    for (const g of list) {
      vectors.set(g.vectors, at);
      at += g.vectors.length;
    }
    progress?.(i / clusters.length);
    return followCluster(problem, {
      k: list[0].k,
      vectors,
      columns,
      levelMax,
      groupWidth: groupWidth / kMax,
      clusterWidth: CLUSTER_WIDTH,
    });
  });
}

function clustersOf(groups: readonly EigenGroup[], width: number): EigenGroup[][] {
  const ks = groups.map((g) => g.k);
  return gather(ks, width).flatMap((indices) => {
    const list = indices.map((i) => groups[i]);
    const members = list.reduce((sum, g) => sum + g.multiplicity, 0);
    return members > MOST_TOGETHER && list.length > 1 ? clustersOf(list, width / 2) : [list];
  });
}
