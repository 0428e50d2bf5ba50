// Where does the memory of factorizations go that are no longer needed?

/** Memory of released factorizations of one plan, for the next ones: touching new memory costs as much as factoring. */
export interface SparePanels {
  /** `shared`: only memory that several threads see. */
  take(shared?: boolean): Float64Array | undefined;
  give(panels: Float64Array): void;
}

/** Keeps at most this many released panels. */
const MOST_SPARE = 2;

export function makeSparePanels(): SparePanels {
  let held: Float64Array[] = [];
  return {
    take(shared = false): Float64Array | undefined {
      const found = held.find((p) => !shared || !(p.buffer instanceof ArrayBuffer));
      held = held.filter((p) => p !== found);
      return found;
    },
    give(panels): void {
      if (held.length < MOST_SPARE) held.push(panels);
    },
  };
}
