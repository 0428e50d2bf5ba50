// Which walled devices with exact answers are there?

import { readFileSync } from 'node:fs';
import { readDevice } from '../../src/device/read.ts';
import { complex, type Complex } from '../../src/numerics/complex.ts';
import type { Polarization } from '../../src/numerics/conventions.ts';
import { findScattering } from '../../src/questions/scatter.ts';
import { layersInGuide } from '../checks/transfer-matrix.ts';
import type { Case } from './cases.ts';
import { type ExactMode, modeRows, type Row } from './rows.ts';

/** Sides of the rectangle. */
const A = 1;
const B = 0.7;

const BAND = [1.5, 9] as const;

const zeros: Readonly<Record<'j' | 'jp', readonly (readonly [number, number])[]>> = JSON.parse(
  readFileSync(new URL('../checks/cavity-modes.json', import.meta.url), 'utf8'),
);

export const walledCases = (): Case[] => [...cavities(), ...slabsInGuides()];

function cavities(): Case[] {
  return (['Ez', 'Hz'] as const).flatMap((polarization) =>
    [5, 8].flatMap((digits) =>
      (['rectangle', 'disk'] as const).map((shape) => ({
        id: `cavity ${shape} ${polarization} digits ${digits}`,
        long: false,
        rows: () => modeRows({ device: cavity(shape, polarization), exact: exactOf(shape, polarization), digits, qMin: 10, complete: () => true }), // prettier-ignore
      })),
    ),
  );
}

function cavity(shape: 'rectangle' | 'disk', polarization: Polarization) {
  const space =
    shape === 'disk'
      ? { disk: { center: [0, 0], radius: 1 } }
      : { rectangle: { center: [A / 2, B / 2], size: [A, B] } };
  const file = { wavewell: 1, polarization, band: { wavenumber: BAND }, bodies: [], enclosure: { spaces: [space] } };
  return readDevice(JSON.stringify(file), 'cavity.json');
}

/** Electric walls: π√((m/a)² + (n/b)²) with m, n ≥ 1 for Ez, m + n ≥ 1 for Hz; zeros of J_m for Ez, of J′_m for Hz. */
function exactOf(shape: 'rectangle' | 'disk', polarization: Polarization): ExactMode[] {
  const mode = (k: number, multiplicity: number): ExactMode => ({ k: complex(k), multiplicity, label: '' });
  if (shape === 'disk')
    return zeros[polarization === 'Ez' ? 'j' : 'jp']
      .filter(([, k]) => k > BAND[0])
      .map(([m, k]) => mode(k, m === 0 ? 1 : 2))
      .sort((x, y) => x.k.re - y.k.re);
  const least = polarization === 'Ez' ? 1 : 0;
  const out: ExactMode[] = [];
  for (let m = least; m < 10; m++) {
    for (let n = least; n < 10; n++) {
      const k = Math.PI * Math.hypot(m / A, n / B);
      if (k > BAND[0] && k < BAND[1]) out.push(mode(k, 1));
    }
  }
  return out.sort((x, y) => x.k.re - y.k.re);
}

/** A slab of ε = 6 (and one with loss) across a guide of width 1, between reference planes at its faces. */
function slabsInGuides(): Case[] {
  const length = 0.8;
  return (['Ez', 'Hz'] as const).flatMap((polarization) =>
    [0, 0.2].flatMap((loss) =>
      [5, 8].map((digits) => ({
        id: `slab in guide ${polarization} loss ${loss} digits ${digits}`,
        long: false,
        rows: (): Row[] => {
          const file = {
            wavewell: 1,
            polarization,
            band: { wavenumber: [3.3, 6] },
            materials: { glass: { permittivity: [6, loss] } },
            guides: [
              { name: 'in', from: [-length / 2, 0], angle: 180, width: 1, length: 0.5, reference: 0 },
              { name: 'out', from: [length / 2, 0], angle: 0, width: 1, length: 0.5, reference: 0 },
            ],
            bodies: [{ material: 'glass', rectangle: { center: [0, 0], size: [length, 1] } }],
            enclosure: { spaces: [{ rectangle: { center: [0, 0], size: [length, 1] } }] },
          };
          const ks = Array.from({ length: 9 }, (_, i) => complex(3.35 + 0.33 * i));
          const answer = findScattering(readDevice(JSON.stringify(file), 'slab.json'), ks, { digits });
          const place = (name: string): number => answer.channels.findIndex((c) => c.name === name);
          const first = polarization === 'Ez' ? 'in.0' : 'in.0';
          const [i, j] = [place(first), place(first.replace('in', 'out'))];
          const n = answer.channels.length;
          return answer.points.flatMap(({ k, matrix, error }) => {
            const layers = [{ permittivity: complex(6, loss), length }];
            const { r, t } = layersInGuide(polarization, layers, polarization === 'Ez' ? Math.PI : 0, k);
            const row = (what: string, at: number, exact: Complex): Row => ({
              what: `${what} at k = ${k.re.toFixed(2)}`,
              exact: `${exact.re.toPrecision(12)} ${exact.im.toPrecision(12)}i`,
              computed: `${matrix[2 * at].toPrecision(12)} ${matrix[2 * at + 1].toPrecision(12)}i`,
              error: Math.hypot(matrix[2 * at] - exact.re, matrix[2 * at + 1] - exact.im),
              bound: 10 ** -digits,
              estimate: error,
            });
            return [row('S11', i + n * i, r), row('S21', j + n * i, t)];
          });
        },
      })),
    ),
  );
}
