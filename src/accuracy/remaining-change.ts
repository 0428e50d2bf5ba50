// What is left of a number after its last change from order to order?

/**
 * r/(1 − r), in units of the last change, for changes that shrink by r. At metal edges r is near 0.7 (windows in a guide:
 * true error 2 to 3 times the last change); smooth fields have r of 0.1 and less, and no two steps are trusted to tell less
 * than `LEAST_RATIO`.
 */
export function remainingChange(before: number, last: number): number {
  const r = Math.min(0.9, Math.max(last / Math.max(before, 1e-300), LEAST_RATIO));
  return r / (1 - r);
}

const LEAST_RATIO = 0.03;
