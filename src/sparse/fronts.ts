// Which dense fronts does the elimination consist of, and how do they hang together?

import type { Dissection } from './dissection.ts';
import { multiplyAdds } from './factors.ts';
import type { Incidence } from './incidence.ts';
import type { ElementPattern } from './pattern.ts';

/**
 * The assembly tree (I. Duff, J. Reid, ACM Trans. Math. Softw. 9 (1983) 302). Front f eliminates the unknowns at the
 * places pivotStarts[f]..pivotStarts[f+1) of the elimination order and passes its boundary on to its parent. Fronts are
 * numbered in the order of elimination: children before parents, subtrees contiguous.
 */
export interface Fronts {
  readonly count: number;
  /** -1 for a root. */
  readonly parent: Int32Array;
  readonly pivotStarts: Int32Array;
  /** unknownAt[place]. */
  readonly unknownAt: Int32Array;
  readonly placeOf: Int32Array;
  /** Places of the boundary of f, increasing: boundary[boundaryStarts[f]..boundaryStarts[f+1]). */
  readonly boundaryStarts: Float64Array;
  readonly boundary: Int32Array;
  /** Children of f, increasing: children[childStarts[f]..childStarts[f+1]). */
  readonly childStarts: Int32Array;
  readonly children: Int32Array;
  /** Where the boundary of f stands in its parent's front; same starts as `boundary`. */
  readonly boundaryInParent: Int32Array;
  /** Elements summed into f directly: elements[elementStarts[f]..elementStarts[f+1]). */
  readonly elementStarts: Int32Array;
  readonly elements: Int32Array;
  /** Where entry i of the pattern's list stands in the front its element goes to; -1 for fixed unknowns. */
  readonly listInFront: Int32Array;
  /** Entries of L below the unit diagonal plus those of D. */
  readonly nonzeros: number;
  /** Real operations of the factorization; a complex multiply-add counts 8. */
  readonly flops: number;
}

/**
 * Time of a front in units of one multiply-add of the blocked kernel, fitted to a two-core server: a call, the pass
 * over its entries, and the arithmetic, which is slower for few pivots.
 */
const CALL_COST = 1500;
const ENTRY_COST = 3;

/** Symbolic elimination along a dissection, small fronts merged into their parents where that saves time. */
export function planFronts(pattern: ElementPattern, incidence: Incidence, dissection: Dissection): Fronts {
  const tree = merge(incidence, eliminate(incidence, dissection));
  return layOut(pattern, incidence, tree);
}

interface Tree {
  /** Node numbers in an order with children first; nodes that were merged away are not in it. */
  readonly order: number[];
  readonly parent: Int32Array;
  readonly children: number[][];
  readonly pivots: number[][];
  readonly boundary: number[][];
  readonly elements: number[][];
}

/** Bundles of every node's front; nodes without pivots dissolve into their parents. */
function eliminate(incidence: Incidence, dissection: Dissection): Tree {
  const { partStarts, parts, bundles, elements: total } = incidence;
  const { nodes, nodeOfBundle, nodeOfElement } = dissection;
  const parent = dissection.parent.slice();
  const pivots: number[][] = Array.from({ length: nodes }, () => []);
  const elements: number[][] = Array.from({ length: nodes }, () => []);
  const children: number[][] = Array.from({ length: nodes }, () => []);
  const boundary: number[][] = Array.from({ length: nodes }, () => []);
  for (let b = 0; b < bundles; b++) pivots[nodeOfBundle[b]].push(b);
  for (let e = 0; e < total; e++) elements[nodeOfElement[e]].push(e);
  const order: number[] = [];
  const marked = new Int32Array(bundles).fill(-1);
  for (let v = 0; v < nodes; v++) {
    const p = parent[v];
    if (pivots[v].length === 0) {
      // Its children and elements go one up; at a root nothing is left to couple them.
      for (const c of children[v]) {
        parent[c] = p;
        if (p >= 0) children[p].push(c);
      }
      if (p >= 0) elements[p].push(...elements[v]);
      continue;
    }
    const list = boundary[v];
    const take = (b: number): void => {
      if (marked[b] === v || nodeOfBundle[b] === v) return;
      marked[b] = v;
      list.push(b);
    };
    for (const c of children[v]) for (const b of boundary[c]) take(b);
    for (const e of elements[v]) for (let i = partStarts[e]; i < partStarts[e + 1]; i++) take(parts[i]);
    order.push(v);
    if (p >= 0) children[p].push(v);
  }
  return { order, parent, children, pivots, boundary, elements };
}

/** Merges children into parents, bottom up, where the modelled time does not grow. */
function merge({ memberStarts }: Incidence, tree: Tree): Tree {
  const { order, parent, children, pivots, boundary, elements } = tree;
  const size = (list: readonly number[]): number => {
    let n = 0;
    for (const b of list) n += memberStarts[b + 1] - memberStarts[b];
    return n;
  };
  const pivotSize = new Int32Array(parent.length);
  const boundarySize = new Int32Array(parent.length);
  const gone = new Uint8Array(parent.length);
  for (const v of order) {
    pivotSize[v] = size(pivots[v]);
    boundarySize[v] = size(boundary[v]);
    let changed = true;
    while (changed) {
      changed = false;
      for (const c of children[v]) {
        const apart = frontCost(pivotSize[c], boundarySize[c]) + frontCost(pivotSize[v], boundarySize[v]);
        if (frontCost(pivotSize[c] + pivotSize[v], boundarySize[v]) > apart) continue;
        pivots[v] = pivots[c].concat(pivots[v]);
        elements[v] = elements[c].concat(elements[v]);
        children[v] = children[v].filter((d) => d !== c).concat(children[c]);
        for (const d of children[c]) parent[d] = v;
        pivotSize[v] += pivotSize[c];
        gone[c] = 1;
        changed = true;
        break;
      }
    }
  }
  return { ...tree, order: order.filter((v) => !gone[v]) };
}

function frontCost(pivots: number, boundary: number): number {
  const size = pivots + boundary;
  const slow = 1 + 6 / pivots;
  return CALL_COST + ENTRY_COST * size * size + slow * (multiplyAdds(pivots, boundary) + 4 * pivots * size);
}

function layOut(pattern: ElementPattern, incidence: Incidence, tree: Tree): Fronts {
  const { memberStarts, members, bundles, elements: total, bundleOf } = incidence;
  const order = postorder(incidence, tree);
  const count = order.length;
  const numberOf = new Int32Array(tree.parent.length).fill(-1);
  order.forEach((v, f) => (numberOf[v] = f));
  const parent = new Int32Array(count);
  const pivotStarts = new Int32Array(count + 1);
  const unknownAt = new Int32Array(pattern.unknowns);
  const placeOf = new Int32Array(pattern.unknowns);
  const rank = new Int32Array(bundles); // first place of a bundle
  const elementStarts = new Int32Array(count + 1);
  const elements = new Int32Array(total);
  const childStarts = new Int32Array(count + 1);
  const children: number[] = [];
  let place = 0;
  let filled = 0;
  order.forEach((v, f) => {
    parent[f] = tree.parent[v] < 0 ? -1 : numberOf[tree.parent[v]];
    for (const b of tree.pivots[v]) {
      rank[b] = place;
      for (let i = memberStarts[b]; i < memberStarts[b + 1]; i++) {
        unknownAt[place] = members[i];
        placeOf[members[i]] = place++;
      }
    }
    pivotStarts[f + 1] = place;
    for (const e of tree.elements[v]) elements[filled++] = e;
    elementStarts[f + 1] = filled;
    for (const c of tree.children[v].map((c) => numberOf[c]).sort((a, b) => a - b)) children.push(c);
    childStarts[f + 1] = children.length;
  });

  const boundaryStarts = new Float64Array(count + 1);
  order.forEach((v, f) => {
    let n = 0;
    for (const b of tree.boundary[v]) n += memberStarts[b + 1] - memberStarts[b];
    boundaryStarts[f + 1] = boundaryStarts[f] + n;
  });
  const boundary = new Int32Array(boundaryStarts[count]);
  order.forEach((v, f) => {
    const list = Int32Array.from(tree.boundary[v], (b) => rank[b]).sort();
    let at = boundaryStarts[f];
    for (const r of list) {
      const b = bundleOf[unknownAt[r]];
      const n = memberStarts[b + 1] - memberStarts[b];
      for (let i = 0; i < n; i++) boundary[at++] = r + i;
    }
  });

  // Local numbers: a scratch map from places to rows of the front at hand.
  const boundaryInParent = new Int32Array(boundary.length);
  const listInFront = new Int32Array(pattern.list.length).fill(-1);
  const row = new Int32Array(pattern.unknowns);
  let nonzeros = 0;
  let flops = 0;
  for (let f = 0; f < count; f++) {
    let r = 0;
    for (let p = pivotStarts[f]; p < pivotStarts[f + 1]; p++) row[p] = r++;
    for (let i = boundaryStarts[f]; i < boundaryStarts[f + 1]; i++) row[boundary[i]] = r++;
    for (let i = childStarts[f]; i < childStarts[f + 1]; i++) {
      const c = children[i];
      for (let j = boundaryStarts[c]; j < boundaryStarts[c + 1]; j++) boundaryInParent[j] = row[boundary[j]];
    }
    for (let i = elementStarts[f]; i < elementStarts[f + 1]; i++) {
      const e = elements[i];
      for (let j = pattern.starts[e]; j < pattern.starts[e + 1]; j++) {
        if (pattern.list[j] >= 0) listInFront[j] = row[placeOf[pattern.list[j]]];
      }
    }
    const np = pivotStarts[f + 1] - pivotStarts[f];
    const nb = boundaryStarts[f + 1] - boundaryStarts[f];
    nonzeros += (np * (np + 1)) / 2 + np * nb;
    flops += 8 * multiplyAdds(np, nb);
  }
  return {
    count,
    parent,
    pivotStarts,
    unknownAt,
    placeOf,
    boundaryStarts,
    boundary,
    childStarts,
    children: Int32Array.from(children),
    boundaryInParent,
    elementStarts,
    elements,
    listInFront,
    nonzeros,
    flops,
  };
}

/**
 * Children with the largest need of memory beyond what they leave behind go first
 * (J. W. H. Liu, ACM Trans. Math. Softw. 12 (1986) 249).
 */
function postorder({ memberStarts }: Incidence, tree: Tree): number[] {
  const need = new Float64Array(tree.parent.length);
  const left = new Float64Array(tree.parent.length);
  const size = (list: readonly number[]): number => {
    let n = 0;
    for (const b of list) n += memberStarts[b + 1] - memberStarts[b];
    return n;
  };
  for (const v of tree.order) {
    const np = size(tree.pivots[v]);
    const nb = size(tree.boundary[v]);
    tree.children[v].sort((a, b) => need[b] - left[b] - (need[a] - left[a]) || a - b);
    let held = 0;
    for (const c of tree.children[v]) {
      need[v] = Math.max(need[v], held + need[c]);
      held += left[c];
    }
    left[v] = nb * (nb + 1);
    need[v] = Math.max(need[v], held + 2 * (np + nb) * np + 2 * nb * nb);
  }
  const order: number[] = [];
  const stack: number[] = [];
  const next = new Int32Array(tree.parent.length);
  for (const root of tree.order) {
    if (tree.parent[root] >= 0) continue;
    stack.push(root);
    while (stack.length > 0) {
      const v = stack[stack.length - 1];
      if (next[v] < tree.children[v].length) stack.push(tree.children[v][next[v]++]);
      else order.push(stack.pop() as number);
    }
  }
  return order;
}
