// What symmetry does a mode show outside the device?

import type { Multipoles } from '../scattering/contrast.ts';

/** Share of the power that one |m| must hold to name a mode by it. */
const PURE = 0.999;

/** "m = 5" where all members radiate into one |m| only, "m even" or "m odd" where the parity is pure, else "". */
export function modeLabel(members: readonly Multipoles[]): string {
  const order = (members[0].length / 2 - 1) / 2;
  const shares = new Float64Array(order + 1);
  for (const a of members) {
    for (let m = -order; m <= order; m++) {
      const i = 2 * (m + order);
      shares[Math.abs(m)] = shares[Math.abs(m)] + a[i] * a[i] + a[i + 1] * a[i + 1];
    }
  }
  const total = shares.reduce((a, b) => a + b, 0);
  if (!(total > 0)) return '';
  const top = shares.indexOf(Math.max(...shares));
  if (shares[top] > PURE * total) return `m = ${top}`;
  const even = shares.reduce((sum, s, m) => (m % 2 === 0 ? sum + s : sum), 0) / total;
  if (even > PURE) return 'm even';
  if (even < 1 - PURE) return 'm odd';
  return '';
}
