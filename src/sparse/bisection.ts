// Where to cut a set of elements in two so that few unknowns touch both halves?

import type { Incidence } from './incidence.ts';

/** Scratch of all bisections of one pattern; every entry of the arrays is at rest (zero) between calls. */
export interface Bisector {
  /**
   * Reorders elements[first..last) so that the two halves are elements[first..middle) and elements[middle..last), and
   * returns middle. `settled[b]` ≠ 0 marks bundles that are already in a separator above: they cost nothing.
   */
  bisect(elements: Int32Array, first: number, last: number, settled: Uint8Array): number;
}

/** Directions tried for the first straight cut, over a half turn. */
const DIRECTIONS = 6;
/** The larger half holds at most this share of the weight. */
const LARGEST_SHARE = 0.56;
/** Refinement passes; each one stops earlier when it no longer gains. */
const PASSES = 8;

/**
 * Straight cuts through the median in several directions, the best ones refined by moving single elements across
 * (C. Fiduccia, R. Mattheyses, "A linear-time heuristic for improving network partitions", DAC 1982), where the cost
 * is the number of unknowns that touch both halves, exactly.
 */
export function makeBisector(incidence: Incidence, centroids: Float64Array): Bisector {
  const { elements: total, bundles, memberStarts, ownerStarts, owners, partStarts, parts } = incidence;
  const side = new Uint8Array(total);
  const inside = new Uint8Array(total);
  const counts = new Int32Array(2 * bundles);
  const here = new Int32Array(bundles);
  const active: number[] = [];
  const keys = new Float64Array(total);
  const weightOf = new Int32Array(total);
  let largestGain = 0;
  for (let e = 0; e < total; e++) {
    for (let i = partStarts[e]; i < partStarts[e + 1]; i++) {
      weightOf[e] += memberStarts[parts[i] + 1] - memberStarts[parts[i]];
    }
    weightOf[e] = Math.max(1, weightOf[e]);
    largestGain = Math.max(largestGain, weightOf[e]);
  }
  // Buckets of movable elements by gain: one doubly linked list a gain and side.
  const width = 2 * largestGain + 1;
  const heads = new Int32Array(2 * width).fill(-1);
  const nextOf = new Int32Array(total);
  const previousOf = new Int32Array(total);
  const gainOf = new Int32Array(total);
  const state = new Uint8Array(total); // 0 outside the buckets, 1 in a bucket, 2 moved in this pass
  const top = new Int32Array(2);
  const bestSide = new Uint8Array(total);

  return { bisect };

  function bisect(elements: Int32Array, first: number, last: number, settled: Uint8Array): number {
    const count = last - first;
    if (count === 2) return first + 1;
    let weight = 0;
    for (let i = first; i < last; i++) {
      const e = elements[i];
      inside[e] = 1;
      weight += weightOf[e];
      for (let j = partStarts[e]; j < partStarts[e + 1]; j++) {
        const b = parts[j];
        if (settled[b]) continue;
        if (here[b]++ === 0) active.push(b);
      }
    }
    // Straight cuts; keep the cheapest two to refine.
    const trials: { cut: number; angle: number }[] = [];
    const directions = count < 6 ? 2 : count < 24 ? 4 : DIRECTIONS;
    for (let d = 0; d < directions; d++) {
      const angle = (Math.PI * d) / directions;
      cutStraight(elements, first, last, angle);
      trials.push({ cut: countSides(elements, first, last, settled), angle });
    }
    trials.sort((a, b) => a.cut - b.cut || a.angle - b.angle);
    let best = Infinity;
    const refined = count < 6 ? 1 : Math.min(2, trials.length);
    for (let t = 0; t < refined; t++) {
      cutStraight(elements, first, last, trials[t].angle);
      let cut = countSides(elements, first, last, settled);
      if (count >= 4) cut = refine(elements, first, last, settled, cut, weight);
      if (cut < best) {
        best = cut;
        for (let i = first; i < last; i++) bestSide[elements[i]] = side[elements[i]];
      }
    }
    let middle = first;
    for (let i = first; i < last; i++) {
      const e = elements[i];
      inside[e] = 0;
      if (bestSide[e] === 0) {
        elements[i] = elements[middle];
        elements[middle++] = e;
      }
    }
    for (const b of active) here[b] = counts[2 * b] = counts[2 * b + 1] = 0;
    active.length = 0;
    return middle;
  }

  /** Side 0 for the half of the elements (by number) with the smaller projection; ties by element number. */
  function cutStraight(elements: Int32Array, first: number, last: number, angle: number): void {
    const cx = Math.cos(angle);
    const cy = Math.sin(angle);
    for (let i = first; i < last; i++) {
      const e = elements[i];
      keys[e] = centroids[2 * e] * cx + centroids[2 * e + 1] * cy;
    }
    const middle = (first + last) >> 1;
    selectRank(elements, keys, first, last - 1, middle);
    for (let i = first; i < last; i++) side[elements[i]] = i < middle ? 0 : 1;
  }

  /** Fills `counts` (owners of each bundle on each side) and returns the number of unknowns on both sides. */
  function countSides(elements: Int32Array, first: number, last: number, settled: Uint8Array): number {
    for (const b of active) counts[2 * b] = counts[2 * b + 1] = 0;
    for (let i = first; i < last; i++) {
      const e = elements[i];
      for (let j = partStarts[e]; j < partStarts[e + 1]; j++) {
        if (!settled[parts[j]]) counts[2 * parts[j] + side[e]]++;
      }
    }
    let cut = 0;
    for (const b of active)
      if (counts[2 * b] > 0 && counts[2 * b + 1] > 0) cut += memberStarts[b + 1] - memberStarts[b];
    return cut;
  }

  function refine(
    elements: Int32Array,
    first: number,
    last: number,
    settled: Uint8Array,
    startCut: number,
    weight: number,
  ): number {
    const count = last - first;
    const largest = Math.max(LARGEST_SHARE * weight, weight / 2 + largestGain);
    const patience = Math.max(12, Math.min(200, count >> 2));
    const loads = [0, 0];
    const population = [0, 0];
    for (let i = first; i < last; i++) {
      loads[side[elements[i]]] += weightOf[elements[i]];
      population[side[elements[i]]]++;
    }
    let cut = startCut;
    const moved: number[] = [];
    for (let pass = 0; pass < PASSES; pass++) {
      top[0] = top[1] = width - 1;
      for (const b of active) {
        if (counts[2 * b] === 0 || counts[2 * b + 1] === 0) continue;
        for (let j = ownerStarts[b]; j < ownerStarts[b + 1]; j++) {
          const e = owners[j];
          if (inside[e] && state[e] === 0) insert(e, gain(e, settled));
        }
      }
      let bestCut = cut;
      let bestMoves = 0;
      let bestTilt = Math.abs(loads[0] - loads[1]);
      const passStart = cut;
      while (moved.length - bestMoves < patience) {
        const e = choose(loads, population, largest);
        if (e < 0) break;
        const from = side[e];
        cut -= gainOf[e];
        remove(e);
        state[e] = 2;
        moved.push(e);
        loads[from] -= weightOf[e];
        loads[1 - from] += weightOf[e];
        population[from]--;
        population[1 - from]++;
        move(e, settled);
        const tilt = Math.abs(loads[0] - loads[1]);
        if (cut < bestCut || (cut === bestCut && tilt < bestTilt)) {
          bestCut = cut;
          bestMoves = moved.length;
          bestTilt = tilt;
        }
      }
      while (moved.length > bestMoves) {
        const e = moved.pop() as number;
        state[e] = 0;
        const from = side[e];
        loads[from] -= weightOf[e];
        loads[1 - from] += weightOf[e];
        population[from]--;
        population[1 - from]++;
        for (let j = partStarts[e]; j < partStarts[e + 1]; j++) {
          const b = parts[j];
          if (settled[b]) continue;
          counts[2 * b + from]--;
          counts[2 * b + 1 - from]++;
        }
        side[e] = 1 - from;
      }
      for (const e of moved) state[e] = 0;
      moved.length = 0;
      emptyBuckets();
      cut = bestCut;
      if (bestCut >= passStart) break;
    }
    return cut;
  }

  /** Unknowns that leave the separator, minus those that enter it, when e changes sides. */
  function gain(e: number, settled: Uint8Array): number {
    const s = side[e];
    let g = 0;
    for (let j = partStarts[e]; j < partStarts[e + 1]; j++) {
      const b = parts[j];
      if (settled[b] || here[b] === 1) continue;
      const w = memberStarts[b + 1] - memberStarts[b];
      if (counts[2 * b + s] === 1) g += w;
      else if (counts[2 * b + 1 - s] === 0) g -= w;
    }
    return g;
  }

  function move(e: number, settled: Uint8Array): void {
    const s = side[e];
    side[e] = 1 - s;
    for (let j = partStarts[e]; j < partStarts[e + 1]; j++) {
      const b = parts[j];
      if (settled[b]) continue;
      const critical = counts[2 * b + s] <= 2 || counts[2 * b + 1 - s] <= 1;
      counts[2 * b + s]--;
      counts[2 * b + 1 - s]++;
      if (!critical || here[b] === 1) continue;
      for (let i = ownerStarts[b]; i < ownerStarts[b + 1]; i++) {
        const f = owners[i];
        if (f === e || !inside[f] || state[f] === 2) continue;
        pending.push(f);
      }
    }
    for (const f of pending) {
      const g = gain(f, settled);
      if (state[f] === 1) {
        if (gainOf[f] === g) continue;
        remove(f);
      }
      insert(f, g);
    }
    pending.length = 0;
  }

  function choose(loads: readonly number[], population: readonly number[], largest: number): number {
    let pick = -1;
    for (let s = 0; s < 2; s++) {
      while (top[s] >= 0 && heads[s * width + top[s]] < 0) top[s]--;
      if (top[s] < 0 || population[s] === 1) continue;
      const e = heads[s * width + top[s]];
      // Moves that would make the larger half too large wait; those out of the larger half are always allowed.
      if (loads[1 - s] + weightOf[e] > largest && loads[1 - s] >= loads[s]) continue;
      if (pick < 0 || gainOf[e] > gainOf[pick] || (gainOf[e] === gainOf[pick] && loads[s] > loads[1 - s])) pick = e;
    }
    return pick;
  }

  function insert(e: number, g: number): void {
    const slot = side[e] * width + g + largestGain;
    gainOf[e] = g;
    state[e] = 1;
    previousOf[e] = -1;
    nextOf[e] = heads[slot];
    if (heads[slot] >= 0) previousOf[heads[slot]] = e;
    heads[slot] = e;
    if (g + largestGain > top[side[e]]) top[side[e]] = g + largestGain;
  }

  function remove(e: number): void {
    state[e] = 0;
    if (previousOf[e] >= 0) nextOf[previousOf[e]] = nextOf[e];
    else heads[side[e] * width + gainOf[e] + largestGain] = nextOf[e];
    if (nextOf[e] >= 0) previousOf[nextOf[e]] = previousOf[e];
  }

  function emptyBuckets(): void {
    for (let slot = 0; slot < 2 * width; slot++) {
      for (let e = heads[slot]; e >= 0; e = nextOf[e]) state[e] = 0;
      heads[slot] = -1;
    }
  }
}

const pending: number[] = [];

/** Hoare's selection: after it, items[rank] has the rank-th smallest key and smaller ones stand before it. */
function selectRank(items: Int32Array, keys: Float64Array, low: number, high: number, rank: number): void {
  while (low < high) {
    const pivot = items[(low + high) >> 1];
    const key = keys[pivot];
    let i = low;
    let j = high;
    while (i <= j) {
      while (keys[items[i]] < key || (keys[items[i]] === key && items[i] < pivot)) i++;
      while (keys[items[j]] > key || (keys[items[j]] === key && items[j] > pivot)) j--;
      if (i <= j) {
        const swap = items[i];
        items[i++] = items[j];
        items[j--] = swap;
      }
    }
    if (rank <= j) high = j;
    else if (rank >= i) low = i;
    else return;
  }
}
