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

export const walledCases = (): Case[] => [...cavities(), ...slabsInGuides(), ...slabModeCases()];

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

const SLAB = 0.8;

/** A slab of ε = 6 + i loss across a guide of width 1; reference planes at its faces. */
function slabDevice(polarization: Polarization, loss: number, band: readonly [number, number]) {
  const file = {
    wavewell: 1,
    polarization,
    band: { wavenumber: band },
    materials: { glass: { permittivity: [6, loss] } },
    guides: [
      { name: 'in', from: [-SLAB / 2, 0], angle: 180, width: 1, length: 0.5, reference: 0 },
      { name: 'out', from: [SLAB / 2, 0], angle: 0, width: 1, length: 0.5, reference: 0 },
    ],
    bodies: [{ material: 'glass', rectangle: { center: [0, 0], size: [SLAB, 1] } }],
    enclosure: { spaces: [{ rectangle: { center: [0, 0], size: [SLAB, 1] } }] },
  };
  return readDevice(JSON.stringify(file), 'slab.json');
}

function slabsInGuides(): Case[] {
  return (['Ez', 'Hz'] as const).flatMap((polarization) =>
    [0, 0.2].flatMap((loss) =>
      [5, 8].map((digits) => ({
        id: `slab in guide ${polarization} loss ${loss} digits ${digits}`,
        long: false,
        rows: (): Row[] => {
          const ks = Array.from({ length: 9 }, (_, i) => complex(3.35 + 0.33 * i));
          const answer = findScattering(slabDevice(polarization, loss, [3.3, 6]), ks, { digits });
          const place = (name: string): number => answer.channels.findIndex((c) => c.name === name);
          const [i, j] = [place('in.0'), place('out.0')];
          const n = answer.channels.length;
          return answer.points.flatMap(({ k, matrix, error }) => {
            const layers = [{ permittivity: complex(6, loss), length: SLAB }];
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

/**
 * A slab of ε = 6, 0.8 long, across a guide of width 1: of each family n (q = nπ) the modes even and odd along the guide,
 * pβ tan βL/2 = −ig and pβ cot βL/2 = ig, β² = εk² − q², g² = k² − q². Newton on these equations in double precision.
 */
const slabModes: Readonly<Record<'Ez' | 'Hz', readonly (readonly [number, number])[]>> = {
  Ez: [
    [4.045793609119674, 0],
    [4.4787178445147005, 0],
    [4.612753054503218, 0],
    [4.962400448061444, -0.3367317346655851],
    [5.297504852995538, 0],
    [5.476549526203435, 0],
    [5.6494408243268746, 0],
    [5.781534145123429, 0],
  ],
  Hz: [
    [3.681512306225179, -0.6077395994020246],
    [3.9169542174485703, 0],
    [4.139995360254593, 0],
    [4.80956186310699, -0.44244659987095847],
    [4.9096726709125935, 0],
    [5.014080290522207, -0.5394582700002846],
    [5.054901088093876, 0],
    [5.358243591559495, 0],
    [5.962551094677654, 0],
    [5.989076190753847, 0],
  ],
};

function slabModeCases(): Case[] {
  return (['Ez', 'Hz'] as const).flatMap((polarization) =>
    [5, 8].map((digits) => ({
      id: `modes of a slab in a guide ${polarization} digits ${digits}`,
      long: false,
      rows: () =>
        modeRows({
          device: slabDevice(polarization, 0, [3.5, 6]),
          exact: slabModes[polarization].map(([re, im]) => ({ k: { re, im }, multiplicity: 1, label: '' })),
          digits,
          qMin: 2,
          complete: () => true,
        }),
    })),
  );
}
