// How singular can a field be at the corners of a mesh?

import { cornerVertices } from '../mesh/corners.ts';
import type { Mesh } from '../mesh/mesh.ts';
import type { RegionWeights } from '../operator/region-weights.ts';

/** Where p of ∇·(p∇u) does not jump, the field holds r² log r: as good as this exponent. */
const WITHOUT_JUMP = 2;

/** λ is sought in steps of this; linear between them. */
const STEP = 0.005;

/**
 * Smallest exponent λ of r^λ at any corner. Going round the corner, (u, p ∂u/∂φ) turns by
 * [cos λα, sin λα/(pλ); −pλ sin λα, cos λα] in each sector α of one material; a solution closes where the product's trace
 * is 2. Source: R. B. Kellogg, Applicable Analysis 4 (1975) 101, singularities of interface problems. With losses |p|.
 */
export function smallestExponent(mesh: Mesh, { stiffness }: RegionWeights): number {
  const p = (region: number): number => Math.hypot(stiffness[2 * (region + 2)], stiffness[2 * (region + 2) + 1]);
  const sectors = new Map<number, { direction: number; angle: number; p: number }[]>();
  for (const v of cornerVertices(mesh)) sectors.set(v, []);
  const { vertices, triangles, regions } = mesh;
  for (let i = 0; i < triangles.length; i++) {
    const list = sectors.get(triangles[i]);
    if (!list) continue;
    const t = Math.floor(i / 3);
    const [x, y] = [vertices[2 * triangles[i]], vertices[2 * triangles[i] + 1]];
    const next = triangles[3 * t + ((i + 1) % 3)];
    const last = triangles[3 * t + ((i + 2) % 3)];
    const from = Math.atan2(vertices[2 * next + 1] - y, vertices[2 * next] - x);
    const to = Math.atan2(vertices[2 * last + 1] - y, vertices[2 * last] - x);
    const angle = (to - from + 2 * Math.PI) % (2 * Math.PI);
    list.push({ direction: from, angle, p: p(regions[t]) });
  }
  let least = WITHOUT_JUMP;
  for (const list of sectors.values()) {
    list.sort((a, b) => a.direction - b.direction);
    if (list.every((s) => s.p === list[0].p) || list.some((s) => !(s.p > 0))) continue;
    least = Math.min(least, firstRoot(list));
  }
  return least;
}

/** First λ below 1 at which the trace comes up to 2 again; 1 where there is none. */
function firstRoot(sectors: readonly { readonly angle: number; readonly p: number }[]): number {
  let before = -Infinity;
  for (let l = STEP; l < 1; l += STEP) {
    let [a, b, c, d] = [1, 0, 0, 1];
    for (const { angle, p } of sectors) {
      const cos = Math.cos(l * angle);
      const sin = Math.sin(l * angle);
      [a, b, c, d] = [
        cos * a + (sin / (p * l)) * c,
        cos * b + (sin / (p * l)) * d,
        -p * l * sin * a + cos * c,
        -p * l * sin * b + cos * d,
      ];
    }
    const f = a + d - 2;
    if (f >= 0 && before < 0 && Number.isFinite(before)) return l - (STEP * f) / (f - before);
    before = f;
  }
  return 1;
}
