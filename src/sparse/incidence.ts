// Which unknowns behave alike, because they belong to the same elements?

import type { ElementPattern } from './pattern.ts';

/**
 * Unknowns grouped into bundles: all unknowns of a bundle belong to exactly the same elements (the inside of an element,
 * the inside of an edge, a vertex). Ordering and symbolic work handle bundles, which are far fewer than unknowns.
 */
export interface Incidence {
  readonly elements: number;
  readonly bundles: number;
  /** Unknowns of bundle b: members[memberStarts[b]..memberStarts[b+1]), increasing. */
  readonly memberStarts: Int32Array;
  readonly members: Int32Array;
  /** Elements of bundle b: owners[ownerStarts[b]..ownerStarts[b+1]), increasing. */
  readonly ownerStarts: Int32Array;
  readonly owners: Int32Array;
  /** Bundles of element e: parts[partStarts[e]..partStarts[e+1]). */
  readonly partStarts: Int32Array;
  readonly parts: Int32Array;
  readonly bundleOf: Int32Array;
}

/**
 * Bundles of a pattern, by refining the partition of the unknowns with one element after the other: O(length of list).
 *
 * @throws RangeError on lengths that do not fit, an unknown out of range, or an unknown that no element holds.
 */
export function findIncidence(pattern: ElementPattern): Incidence {
  checkPattern(pattern);
  const { unknowns, starts, list } = pattern;
  const elements = starts.length - 1;
  const bundleOf = splitByElements(pattern);

  const sizes = new Int32Array(unknowns + 1);
  let bundles = 0;
  const renumbered = new Map<number, number>();
  for (let u = 0; u < unknowns; u++) {
    let b = renumbered.get(bundleOf[u]);
    if (b === undefined) {
      b = bundles++;
      renumbered.set(bundleOf[u], b);
    }
    bundleOf[u] = b;
    sizes[b]++;
  }
  const memberStarts = startsOf(sizes, bundles);
  const members = new Int32Array(unknowns);
  const next = memberStarts.slice();
  for (let u = 0; u < unknowns; u++) members[next[bundleOf[u]]++] = u;

  // Each bundle once per element, then the transpose.
  const partStarts = new Int32Array(elements + 1);
  const parts: number[] = [];
  const seen = new Int32Array(bundles).fill(-1);
  const ownerCounts = new Int32Array(bundles + 1);
  for (let e = 0; e < elements; e++) {
    for (let i = starts[e]; i < starts[e + 1]; i++) {
      if (list[i] < 0) continue;
      const b = bundleOf[list[i]];
      if (seen[b] === e) continue;
      seen[b] = e;
      parts.push(b);
      ownerCounts[b]++;
    }
    partStarts[e + 1] = parts.length;
  }
  const ownerStarts = startsOf(ownerCounts, bundles);
  const owners = new Int32Array(parts.length);
  const fill = ownerStarts.slice();
  for (let e = 0; e < elements; e++) {
    for (let i = partStarts[e]; i < partStarts[e + 1]; i++) owners[fill[parts[i]]++] = e;
  }
  return {
    elements,
    bundles,
    memberStarts,
    members,
    ownerStarts,
    owners,
    partStarts,
    parts: Int32Array.from(parts),
    bundleOf,
  };
}

function checkPattern({ unknowns, starts, list, centroids }: ElementPattern): void {
  if (!Number.isInteger(unknowns) || unknowns < 0) {
    throw new RangeError(`unknowns is ${unknowns}; expected a whole number ≥ 0`);
  }
  if (starts.length < 1 || starts[0] !== 0 || starts[starts.length - 1] !== list.length) {
    throw new RangeError(`starts must run from 0 to the length of list (${list.length})`);
  }
  for (let e = 0; e + 1 < starts.length; e++) {
    if (starts[e + 1] < starts[e]) throw new RangeError(`starts decreases at element ${e}; expected increasing starts`);
  }
  if (centroids.length !== 2 * (starts.length - 1)) {
    throw new RangeError(`centroids has ${centroids.length} numbers; expected 2 × ${starts.length - 1} elements`);
  }
  const held = new Uint8Array(unknowns);
  for (let i = 0; i < list.length; i++) {
    const u = list[i];
    if (u < -1 || u >= unknowns) throw new RangeError(`list[${i}] is ${u}; expected -1 or 0 … ${unknowns - 1}`);
    if (u >= 0) held[u] = 1;
  }
  const lost = held.indexOf(0);
  if (lost >= 0) throw new RangeError(`unknown ${lost} belongs to no element: its row would be zero`);
}

function splitByElements({ unknowns, starts, list }: ElementPattern): Int32Array {
  const classOf = new Int32Array(unknowns);
  const splitBy = new Int32Array(list.length + 1).fill(-1);
  const splitTo = new Int32Array(list.length + 1);
  const touched = new Int32Array(unknowns).fill(-1);
  let classes = 1;
  for (let e = 0; e + 1 < starts.length; e++) {
    for (let i = starts[e]; i < starts[e + 1]; i++) {
      const u = list[i];
      if (u < 0 || touched[u] === e) continue;
      touched[u] = e;
      const c = classOf[u];
      if (splitBy[c] !== e) {
        splitBy[c] = e;
        splitTo[c] = classes++;
      }
      classOf[u] = splitTo[c];
    }
  }
  return classOf;
}

function startsOf(counts: Int32Array, length: number): Int32Array {
  const starts = new Int32Array(length + 1);
  for (let i = 0; i < length; i++) starts[i + 1] = starts[i] + counts[i];
  return starts;
}
