// How do layers in a straight guide reflect and transmit one mode, by transfer matrices?

import {
  add,
  type Complex,
  complex,
  divide,
  multiply,
  scale,
  squareRoot,
  subtract,
} from '../../src/numerics/complex.ts';

/** A layer that fills the guide: permittivity and length along it. */
export interface GuideLayer {
  readonly permittivity: Complex;
  readonly length: number;
}

/**
 * Reflection r from the left face and transmission t to the right face, for u of `Ez` (p = 1) or `Hz` (p = 1/ε) with the
 * transverse wavenumber q, vacuum on both sides. (u, p u′) is carried through each layer by
 * [[cos βd, sin βd/(pβ)], [−pβ sin βd, cos βd]], β = √(εk² − q²): textbook.
 */
export function layersInGuide(
  polarization: 'Ez' | 'Hz',
  layers: readonly GuideLayer[],
  q: number,
  k: Complex,
): { readonly r: Complex; readonly t: Complex } {
  // rows of the product M: (u, pu′) at the left = M (u, pu′) at the right, each inverse with −d
  let m: readonly Complex[] = [complex(1), complex(0), complex(0), complex(1)];
  for (const { permittivity, length } of layers) {
    const beta = squareRoot(subtract(multiply(permittivity, multiply(k, k)), complex(q * q)));
    const p = polarization === 'Ez' ? complex(1) : divide(complex(1), permittivity);
    const [c, s] = cosSin(scale(beta, length));
    const pb = multiply(p, beta);
    const l = [c, scale(divide(s, pb), -1), multiply(pb, s), c];
    m = [
      add(multiply(m[0], l[0]), multiply(m[1], l[2])),
      add(multiply(m[0], l[1]), multiply(m[1], l[3])),
      add(multiply(m[2], l[0]), multiply(m[3], l[2])),
      add(multiply(m[2], l[1]), multiply(m[3], l[3])),
    ];
  }
  const b = multiply(complex(0, 1), squareRoot(subtract(multiply(k, k), complex(q * q))));
  // 1 + r = (m0 + m1 b) t, b (1 − r) = (m2 + m3 b) t
  const x = add(m[0], multiply(m[1], b));
  const y = divide(add(m[2], multiply(m[3], b)), b);
  const t = divide(complex(2), add(x, y));
  return { r: subtract(multiply(x, t), complex(1)), t };
}

/** Newton in two real unknowns for f(x, y) = 0 complex, derivatives by central differences. */
export function solveReal(f: (x: number, y: number) => Complex, x: number, y: number): readonly [number, number] {
  for (let step = 0; step < 60; step++) {
    const h = 1e-6;
    const value = f(x, y);
    const dx = scale(subtract(f(x + h, y), f(x - h, y)), 0.5 / h);
    const dy = scale(subtract(f(x, y + h), f(x, y - h)), 0.5 / h);
    const det = dx.re * dy.im - dx.im * dy.re;
    const ux = -(value.re * dy.im - value.im * dy.re) / det;
    const uy = -(dx.re * value.im - dx.im * value.re) / det;
    x += ux;
    y += uy;
    if (Math.abs(ux) + Math.abs(uy) < 1e-15 * (Math.abs(x) + Math.abs(y))) break;
  }
  return [x, y];
}

function cosSin(z: Complex): readonly [Complex, Complex] {
  const [c, s] = [Math.cos(z.re), Math.sin(z.re)];
  const [ch, sh] = [Math.cosh(z.im), Math.sinh(z.im)];
  return [complex(c * ch, -s * sh), complex(s * ch, c * sh)];
}
