// How do several threads work on one large front?

// The thread that factors a front publishes a task of many items; the others, which wait in `help`, take items too.
// Each item writes its own rows or columns, so that the numbers do not depend on who took it. The words below lie at
// a fixed place of the shared memory. A helper raises `active` before it looks whether the task is open; the
// publisher closes the task and waits until nobody is active before it writes another one.

import { belowSlabs, updateColumns } from './front';

/** Fewer slabs of 4 rows below a panel are not worth the hand-over. */
export const SHARED_SLABS: i32 = 32;
/** Whether this thread publishes. */
export let sharing: bool = false;

export function setSharing(on: bool): void {
  sharing = on;
}

const EPOCH: usize = 2048;
const OPEN: usize = 2112;
const NEXT: usize = 2176;
const FINISHED: usize = 2240;
const ACTIVE: usize = 2304;
const STOP: usize = 2368;
/** Task: items, kind, then its arguments. */
const TASK: usize = 2432;
const SPINS: i32 = 4000;
/** Slabs of rows, and of columns, an item. */
const ROW_ITEM: i32 = 8;
const COLUMN_ITEM: i32 = 2;
/** Rows of L that stay in cache while the columns of an item pass. */
const SLAB_BLOCK: i32 = 32;

export function share(
  p: usize,
  s: usize,
  nf: i32,
  np: i32,
  first: i32,
  last: i32,
  done: i32,
  d: usize,
  triangle: usize,
  w: usize,
  l: usize,
  slabs: i32,
  stride: usize,
): void {
  store<usize>(TASK, p, 8);
  store<usize>(TASK, s, 12);
  store<i32>(TASK, nf, 16);
  store<i32>(TASK, np, 20);
  store<i32>(TASK, first, 24);
  store<i32>(TASK, last, 28);
  store<i32>(TASK, done, 32);
  store<usize>(TASK, d, 36);
  store<usize>(TASK, triangle, 40);
  store<usize>(TASK, w, 44);
  store<usize>(TASK, l, 48);
  store<i32>(TASK, slabs, 52);
  store<usize>(TASK, stride, 56);
  publish(0, (slabs + ROW_ITEM - 1) / ROW_ITEM);
  publish(1, (slabs + COLUMN_ITEM - 1) / COLUMN_ITEM);
}

function publish(kind: i32, items: i32): void {
  store<i32>(TASK, items);
  store<i32>(TASK, kind, 4);
  atomic.store<i32>(NEXT, 0);
  atomic.store<i32>(FINISHED, 0);
  atomic.store<i32>(OPEN, 1);
  atomic.add<i32>(EPOCH, 1);
  atomic.notify(EPOCH, -1);
  takeItems();
  while (atomic.load<i32>(FINISHED) < items) {}
  atomic.store<i32>(OPEN, 0);
  while (atomic.load<i32>(ACTIVE) > 0) {}
}

function takeItems(): void {
  const items = load<i32>(TASK);
  for (;;) {
    const item = atomic.add<i32>(NEXT, 1);
    if (item >= items) return;
    doItem(item);
    atomic.add<i32>(FINISHED, 1);
  }
}

function doItem(item: i32): void {
  const p = load<usize>(TASK, 8);
  const s = load<usize>(TASK, 12);
  const nf = load<i32>(TASK, 16);
  const np = load<i32>(TASK, 20);
  const first = load<i32>(TASK, 24);
  const last = load<i32>(TASK, 28);
  const done = load<i32>(TASK, 32);
  const w = load<usize>(TASK, 44);
  const l = load<usize>(TASK, 48);
  const slabs = load<i32>(TASK, 52);
  const stride = load<usize>(TASK, 56);
  if (load<i32>(TASK, 4) == 0) {
    const from = item * ROW_ITEM;
    const end = min(slabs, from + ROW_ITEM);
    belowSlabs(p, nf, np, first, last, done, load<usize>(TASK, 36), load<usize>(TASK, 40), w, l, stride, from, end);
    return;
  }
  const from = item * COLUMN_ITEM;
  const end = min(slabs, from + COLUMN_ITEM);
  for (let block = from; block < slabs; block += SLAB_BLOCK) {
    const blockEnd = min(slabs, block + SLAB_BLOCK);
    for (let j = from; j < end; j++) {
      updateColumns(p, s, nf, np, last, done - first, w + <usize>j * stride, l, j, max(block, j), blockEnd, stride);
    }
  }
}

/** Works on published tasks until stopHelp; `epoch` is the one that was current when the caller began. */
export function help(epoch: i32): void {
  for (;;) {
    let spins = 0;
    while (atomic.load<i32>(EPOCH) == epoch) {
      if (++spins > SPINS) atomic.wait<i32>(EPOCH, epoch, 100000000);
    }
    epoch = atomic.load<i32>(EPOCH);
    if (atomic.load<i32>(STOP) != 0) return;
    atomic.add<i32>(ACTIVE, 1);
    if (atomic.load<i32>(OPEN) != 0) takeItems();
    atomic.sub<i32>(ACTIVE, 1);
  }
}

/** Ends all `help` calls; the words are ready for another round once every helper has left. */
export function stopHelp(stop: i32): void {
  atomic.store<i32>(STOP, stop);
  if (stop == 0) return;
  atomic.add<i32>(EPOCH, 1);
  atomic.notify(EPOCH, -1);
}
