// In what order are the unknowns eliminated?

import { makeBisector } from './bisection.ts';
import type { Incidence } from './incidence.ts';
import type { ElementPattern } from './pattern.ts';

/**
 * A binary tree over the elements. A node eliminates the bundles that touch both of its halves (a leaf: all that are
 * left of its one element). Nodes are numbered so that children come before their parent.
 */
export interface Dissection {
  readonly nodes: number;
  /** -1 for the root. */
  readonly parent: Int32Array;
  readonly nodeOfBundle: Int32Array;
  readonly nodeOfElement: Int32Array;
}

/** An element with more unknowns than this and than HUB_RATIO times the mean is a hub. */
const HUB_SIZE = 100;
const HUB_RATIO = 4;

/**
 * Nested dissection (A. George, SIAM J. Numer. Anal. 10 (1973) 345) on elements. Hubs (elements that couple very many
 * unknowns, such as a dense boundary operator) stay outside the cutting: their unknowns go to the root.
 */
export function dissect(pattern: ElementPattern, incidence: Incidence): Dissection {
  const { elements: total, bundles, partStarts, parts, ownerStarts } = incidence;
  const nodeOfBundle = new Int32Array(bundles).fill(-1);
  const nodeOfElement = new Int32Array(total).fill(-1);
  const parent: number[] = [];
  const settled = new Uint8Array(bundles);

  const hubs: number[] = [];
  const plain: number[] = [];
  const mean = pattern.list.length / Math.max(1, total);
  for (let e = 0; e < total; e++) {
    const size = pattern.starts[e + 1] - pattern.starts[e];
    if (size > HUB_SIZE && size > HUB_RATIO * mean) hubs.push(e);
    else plain.push(e);
  }
  const rootBundles: number[] = [];
  for (const e of hubs) {
    for (let i = partStarts[e]; i < partStarts[e + 1]; i++) {
      const b = parts[i];
      // What only the hub holds is eliminated in the hub's own front.
      if (settled[b] || ownerStarts[b + 1] - ownerStarts[b] === 1) continue;
      settled[b] = 1;
      rootBundles.push(b);
    }
  }
  const bisector = makeBisector(incidence, pattern.centroids);
  const order = Int32Array.from(plain);
  const seen = new Int32Array(bundles).fill(-1);
  const tops: number[] = [];
  if (order.length > 0) tops.push(divide(0, order.length));
  for (const e of hubs) tops.push(leaf(e));
  if (tops.length > 1 || rootBundles.length > 0) {
    const root = parent.push(-1) - 1;
    for (const top of tops) parent[top] = root;
    for (const b of rootBundles) nodeOfBundle[b] = root;
  }
  return { nodes: parent.length, parent: Int32Array.from(parent), nodeOfBundle, nodeOfElement };

  function divide(first: number, last: number): number {
    if (last - first === 1) return leaf(order[first]);
    const middle = bisector.bisect(order, first, last, settled);
    const cut: number[] = [];
    for (let i = first; i < middle; i++) {
      for (let j = partStarts[order[i]]; j < partStarts[order[i] + 1]; j++) seen[parts[j]] = first;
    }
    for (let i = middle; i < last; i++) {
      for (let j = partStarts[order[i]]; j < partStarts[order[i] + 1]; j++) {
        const b = parts[j];
        if (seen[b] !== first || settled[b]) continue;
        settled[b] = 1;
        cut.push(b);
      }
    }
    for (let i = first; i < middle; i++) {
      for (let j = partStarts[order[i]]; j < partStarts[order[i] + 1]; j++) seen[parts[j]] = -1;
    }
    const left = divide(first, middle);
    const right = divide(middle, last);
    const node = parent.push(-1) - 1;
    parent[left] = parent[right] = node;
    for (const b of cut) nodeOfBundle[b] = node;
    return node;
  }

  function leaf(e: number): number {
    const node = parent.push(-1) - 1;
    nodeOfElement[e] = node;
    for (let j = partStarts[e]; j < partStarts[e + 1]; j++) {
      const b = parts[j];
      if (settled[b]) continue;
      settled[b] = 1;
      nodeOfBundle[b] = node;
    }
    return node;
  }
}
