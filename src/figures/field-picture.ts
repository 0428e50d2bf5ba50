// Which colour does each pixel of a field get?

import {
  bytesOf,
  colourAt,
  cyclicMap,
  divergingMap,
  PALETTES,
  sequentialMap,
  type ColourMap,
  type Theme,
} from '../results/colours.ts';

/** How a complex field is shown: Re(u e^{−iωt}) at one time, |u|², or arg u (pale where |u| is small). */
export type FieldView = 'wave' | 'intensity' | 'phase';

export interface FieldSamples {
  /** [x0,y0,…] in pixels, y down. */
  readonly points: ArrayLike<number>;
  /** Three points a triangle, either sense. */
  readonly triangles: ArrayLike<number>;
  /** Interleaved complex, one a point. */
  readonly values: ArrayLike<number>;
  /** |u| at which the colours reach their ends. */
  readonly limit: number;
  /** Where the field ends, pixels. */
  readonly rim: { readonly x: number; readonly y: number; readonly radius: number };
}

/**
 * RGBA bytes of the field: Re u and Im u are interpolated to each pixel's centre first and turned into a colour after,
 * so that zero lines stay sharp. Pixels on the rim are covered in proportion; outside is transparent.
 */
export function paintField(
  field: FieldSamples,
  view: FieldView,
  phase: number,
  theme: Theme,
  across: number,
  down: number,
): Uint8Array {
  const { re, im, near } = interpolate(field, across, down);
  const { table, share } = colouring(view, phase, theme, field.limit);
  const ground = bytesOf(PALETTES[theme].ground);
  const { x, y, radius } = field.rim;
  const rgba = new Uint8Array(4 * across * down);
  for (let j = 0; j < down; j++) {
    for (let i = 0; i < across; i++) {
      const p = j * across + i;
      if (near[p] < -REACH) continue;
      const cover = Math.min(1, Math.max(0, radius + 0.5 - Math.hypot(i + 0.5 - x, j + 0.5 - y)));
      if (cover === 0) continue;
      const t = 3 * Math.round(Math.min(1, Math.max(0, share(re[p], im[p]))) * FINE);
      // Where a wave is too weak to have a phase worth showing, the ground shows through.
      const strong = view === 'phase' ? Math.min(1, Math.hypot(re[p], im[p]) / (FAINT * field.limit)) : 1;
      for (let c = 0; c < 3; c++) rgba[4 * p + c] = ground[c] + strong * (table[t + c] - ground[c]) + 0.5;
      rgba[4 * p + 3] = 255 * cover + 0.5;
    }
  }
  return rgba;
}

/** Steps of the colour tables: finer than 8 bits can show. */
const FINE = 2048;

/** Share of the limit below which a phase fades into the ground. */
const FAINT = 0.15;

/** How far (pixels) a triangle's values are carried beyond its sides: the rim is round, triangles are not. */
const REACH = 1.5;

/** Values at pixel centres, and how far inside the best triangle each centre lies (negative: outside). */
function interpolate(
  { points, triangles, values }: FieldSamples,
  across: number,
  down: number,
): { re: Float32Array; im: Float32Array; near: Float32Array } {
  const re = new Float32Array(across * down);
  const im = new Float32Array(across * down);
  const near = new Float32Array(across * down).fill(-Infinity);
  for (let t = 0; t < triangles.length; t += 3) {
    const [a, b, c] = [triangles[t], triangles[t + 1], triangles[t + 2]];
    const [ax, ay] = [points[2 * a], points[2 * a + 1]];
    const [bx, by] = [points[2 * b], points[2 * b + 1]];
    const [cx, cy] = [points[2 * c], points[2 * c + 1]];
    const det = (bx - ax) * (cy - ay) - (by - ay) * (cx - ax);
    if (det === 0) continue;
    // Distances to the sides opposite a, b and c, positive inside: barycentric coordinate × height.
    const ha = Math.abs(det) / Math.hypot(cx - bx, cy - by);
    const hb = Math.abs(det) / Math.hypot(ax - cx, ay - cy);
    const hc = Math.abs(det) / Math.hypot(bx - ax, by - ay);
    const left = Math.max(0, Math.floor(Math.min(ax, bx, cx) - REACH));
    const right = Math.min(across - 1, Math.ceil(Math.max(ax, bx, cx) + REACH));
    const top = Math.max(0, Math.floor(Math.min(ay, by, cy) - REACH));
    const bottom = Math.min(down - 1, Math.ceil(Math.max(ay, by, cy) + REACH));
    for (let j = top; j <= bottom; j++) {
      const y = j + 0.5;
      for (let i = left; i <= right; i++) {
        const x = i + 0.5;
        const lb = ((x - ax) * (cy - ay) - (y - ay) * (cx - ax)) / det;
        const lc = ((bx - ax) * (y - ay) - (by - ay) * (x - ax)) / det;
        const la = 1 - lb - lc;
        const inside = Math.min(la * ha, lb * hb, lc * hc);
        const p = j * across + i;
        if (inside < -REACH || inside <= near[p]) continue;
        near[p] = inside;
        re[p] = la * values[2 * a] + lb * values[2 * b] + lc * values[2 * c];
        im[p] = la * values[2 * a + 1] + lb * values[2 * b + 1] + lc * values[2 * c + 1];
      }
    }
  }
  return { re, im, near };
}

/** Colours from low to high (3 × (FINE + 1) bytes), and where on that way (0 to 1) a value lies. `phase` is ωt, radians. */
function colouring(
  view: FieldView,
  phase: number,
  theme: Theme,
  limit: number,
): { readonly table: Uint8Array; readonly share: (re: number, im: number) => number } {
  const [c, s] = [Math.cos(phase) / (2 * limit), Math.sin(phase) / (2 * limit)];
  const square = limit * limit;
  const turn = 1 / (2 * Math.PI);
  return {
    wave: {
      table: finerTable(divergingMap(theme)),
      // Re(u e^{−iωt}) = Re u cos ωt + Im u sin ωt
      share: (re: number, im: number) => 0.5 + re * c + im * s,
    },
    intensity: {
      table: finerTable(sequentialMap(theme)),
      share: (re: number, im: number) => (re * re + im * im) / square,
    },
    phase: {
      table: finerTable(cyclicMap(theme)),
      share: (re: number, im: number) => Math.atan2(im, re) * turn + (im < 0 ? 1 : 0),
    },
  }[view];
}

function finerTable(map: ColourMap): Uint8Array {
  const table = new Uint8Array(3 * (FINE + 1));
  for (let i = 0; i <= FINE; i++) table.set(colourAt(map, i / FINE), 3 * i);
  return table;
}
