// Which keys does a device file have, and what does each hold?

import { z } from 'zod';

/** Version of the format that this program reads. */
export const FORMAT_VERSION = 1;

/** JSON Schema (draft 2020-12) of the device file, for editors. The check itself uses the same source. */
export function deviceJsonSchema(): Record<string, unknown> {
  return z.toJSONSchema(deviceSchema, { io: 'input', target: 'draft-2020-12' });
}

export const NUMBER = 'a number, or an expression of knobs such as "2*radius + 0.1"';
export const COMPLEX = `${NUMBER}; or [real part, imaginary part], where a positive imaginary part is loss`;
const KNOB = 'a number or expression, or { value, range, tolerance }';

export const KNOB_NAME = /^[\p{L}_][\p{L}\p{N}_]*$/u;
/** Names of materials and bodies: no brackets, which number the members of arrays. */
export const NAME = /^[\p{L}_][\p{L}\p{N}_ .-]{0,63}$/u;

const number = (description: string) => z.union([z.number(), z.string()], { error: NUMBER }).meta({ description });
const point = (description: string) => z.tuple([number('x'), number('y')]).meta({ description });
const complexNumber = (description: string) =>
  z
    .union([z.number(), z.string(), z.tuple([number('Real part.'), number('Imaginary part; positive is loss.')])], {
      error: COMPLEX,
    })
    .meta({ description });
const name = (description: string) => z.string().regex(NAME).meta({ description });
const pair = (first: string, second: string, description: string) =>
  z.tuple([number(first), number(second)]).meta({ description });

const center = point('Center [x, y].');
const angle = number('Turn about the center, degrees counterclockwise; 0 if absent.').optional();

const shapeKeys = {
  disk: z.strictObject({ center, radius: number('Radius, above 0.') }).meta({ description: 'A full circle.' }),
  ring: z
    .strictObject({ center, outer: number('Outer radius.'), inner: number('Inner radius, above 0 and below outer.') })
    .meta({ description: 'A circle with a round hole in its middle.' }),
  ellipse: z
    .strictObject({ center, radii: pair('First semi-axis.', 'Second semi-axis.', 'Both semi-axes.'), angle })
    .meta({ description: 'An ellipse; the first semi-axis lies along x before the turn.' }),
  rectangle: z
    .strictObject({
      center,
      size: pair('Width.', 'Height.', 'Width along x and height along y, before the turn.'),
      angle,
      corner_radius: number('Radius of rounded corners, at most half the shorter side; 0 if absent.').optional(),
    })
    .meta({ description: 'A rectangle, sharp or rounded.' }),
  polygon: z
    .strictObject({
      points: z
        .array(point('Corner [x, y].'))
        .min(3)
        .meta({ description: 'Corners in order, either way round; it closes itself.' }),
    })
    .meta({ description: 'Straight sides through given corners.' }),
  regular_polygon: z
    .strictObject({
      center,
      radius: number('From the center to a corner (circumradius), above 0.'),
      sides: number('Number of sides, 3 or more.'),
      angle: number(
        'Direction of the first corner from the center, degrees counterclockwise from x; 0 if absent.',
      ).optional(),
    })
    .meta({ description: 'Equal sides and angles.' }),
};

export type ShapeKey = keyof typeof shapeKeys;
export const SHAPE_KEYS = Object.keys(shapeKeys) as ShapeKey[];

const optionalShapes = {
  disk: shapeKeys.disk.optional(),
  ring: shapeKeys.ring.optional(),
  ellipse: shapeKeys.ellipse.optional(),
  rectangle: shapeKeys.rectangle.optional(),
  polygon: shapeKeys.polygon.optional(),
  regular_polygon: shapeKeys.regular_polygon.optional(),
};

/** Says in the JSON Schema that exactly one of the keys is given; `readDevice` checks it with a place. */
const exactlyOneOf = (keys: readonly string[]) => ({ oneOf: keys.map((key) => ({ required: [key] })) });

const region = z
  .strictObject(optionalShapes)
  .meta({ description: 'The region to fill: one shape.', ...exactlyOneOf(SHAPE_KEYS) });

const grid = z
  .strictObject({
    count: pair('Columns.', 'Rows.', 'Number of columns and rows.'),
    pitch: pair('Step from column to column.', 'Step from row to row.', 'Steps [dx, dy].'),
  })
  .meta({ description: 'Rows and columns. The shape as drawn is the first member; columns count first.' });

const wheel = z
  .strictObject({
    around: point('Center of the circle of members.'),
    radius: number('Radius of that circle, above 0.'),
    count: number('Number of members, evenly spaced.'),
    start_angle: number('Direction of the first member, degrees counterclockwise from x; 0 if absent.').optional(),
    turn: z
      .boolean()
      .optional()
      .meta({ description: 'Whether each member is turned to face outward; true if absent.' }),
  })
  .meta({
    description:
      'Members on a circle. Draw the shape about [0, 0] as it looks when it sits at angle 0, to the right of the middle.',
  });

const array = z
  .union([grid, wheel], { error: '{ count: [nx, ny], pitch: [dx, dy] } or { around, radius, count }' })
  .meta({
    description: 'Repeats the shape; members are called name[0], name[1], …',
  });

const scatter = z
  .strictObject({
    inside: region,
    count: number('Number of members.'),
    seed: number('Whole number; the same seed gives the same places.'),
    minimum_gap: number('Smallest distance between the circles around two members, 0 or more.'),
  })
  .meta({
    description: 'Repeats the shape at random places wholly inside a region; members are called name[0], name[1], …',
  });

const body = z
  .strictObject({
    name: name('Name of the body; body1, body2, … if absent.').optional(),
    material: name('Name of its material.'),
    ...optionalShapes,
    array: array.optional(),
    scatter: scatter.optional(),
  })
  .meta({ description: 'One shape of one material, or an array or scatter of it.', ...exactlyOneOf(SHAPE_KEYS) });

const materialKeys = ['index', 'permittivity', 'conductivity'];
const material = z
  .strictObject({
    conductivity: number(
      'Conductivity of a metal, S/m: a body of it is a wall with the surface impedance (1 − i)√(ωμ₀/2σ). Alone.',
    ).optional(),
    index: complexNumber('Refractive index n + iκ; its square is the permittivity.').optional(),
    permittivity: complexNumber('Relative permittivity.').optional(),
    loss_tangent: number('Multiplies a real permittivity by 1 + i tan δ; 0 or more.').optional(),
    permeability: complexNumber('Relative permeability; 1 if absent. Not together with index.').optional(),
    gain: z.boolean().optional().meta({ description: 'Must be true when an imaginary part is negative.' }),
  })
  .meta({ description: 'A material that does not depend on frequency.', ...exactlyOneOf(materialKeys) });

const enclosure = z
  .strictObject({
    wall: name('Material of the wall: "electric wall" if absent, "magnetic wall", or a metal.').optional(),
    spaces: z
      .array(region)
      .min(1)
      .meta({ description: 'The shapes that are hollow inside; together they are the space that holds the waves.' }),
  })
  .meta({ description: 'Walls all around: there is no open space then, except through guides.' });

const guide = z
  .strictObject({
    name: name('Name of the guide.'),
    from: point('Middle of the cross-section where the guide begins; S-parameters are referred to this plane.'),
    angle: number('Direction in which it runs to infinity, degrees counterclockwise from x.'),
    size: z.string().optional().meta({ description: 'Name of a standard rectangular guide, such as WR-90 or R100.' }),
    width: number('Inner width, above 0. Either size or width.').optional(),
    length: number(
      'Stretch of guide that is meshed before it is closed exactly, above 0; its width if absent.',
    ).optional(),
    modes: number(
      'Number of its modes that are channels; all that propagate at the top of the band if absent.',
    ).optional(),
    reference: number('Reference plane, this far along the guide from its beginning; 0 if absent.').optional(),
    wall: name('"electric wall" (if absent) or "magnetic wall": the channel is exact for perfect walls.').optional(),
  })
  .meta({ description: 'A guide between two parallel walls, filled with the background, that runs to infinity.' });

const sheet = z
  .strictObject({
    name: name('Name of the sheet; sheet1, sheet2, … if absent.').optional(),
    wall: name('Material of both its faces: "electric wall" if absent, "magnetic wall", or a metal.').optional(),
    points: z.array(point('Point [x, y].')).min(2).meta({ description: 'Points in order, joined by straight lines.' }),
  })
  .meta({ description: 'A wall without thickness along straight lines, such as a thin window.' });

const symmetry = z
  .strictObject({
    x: number('The line x = this value; the side of larger x is kept.').optional(),
    y: number('The line y = this value; the side of larger y is kept.').optional(),
    field: z.enum(['even', 'odd']).meta({
      description: 'Whether the field out of the plane keeps its sign (even) or changes it (odd) across the line.',
    }),
  })
  .meta({
    description: 'A symmetry line: what is drawn beyond it is replaced by the mirror image of the kept side.',
    ...exactlyOneOf(['x', 'y']),
  });

export const BAND_KEYS = ['wavelength', 'frequency', 'energy', 'wavenumber'] as const;
const limits = (description: string) => pair('Lower limit.', 'Upper limit.', description).optional();
const band = z
  .strictObject({
    wavelength: limits('Vacuum wavelength, in the length unit.'),
    frequency: limits('Frequency, in the unit given beside it.'),
    energy: limits('Photon energy, in the unit given beside it.'),
    wavenumber: limits('Vacuum wavenumber 2π/λ, in 1/length unit.'),
    unit: z
      .enum(['Hz', 'kHz', 'MHz', 'GHz', 'THz', 'meV', 'eV'])
      .optional()
      .meta({ description: 'Unit of frequency (Hz … THz) or energy (meV, eV).' }),
  })
  .meta({
    description: 'The band to look at: one quantity with its lower and upper limit.',
    ...exactlyOneOf(BAND_KEYS),
  });

const knob = z
  .union(
    [
      z.number(),
      z.string(),
      z.strictObject({
        value: number('Value, or expression of other knobs.'),
        range: pair('Smallest value.', 'Largest value.', 'Values it may take.').optional(),
        tolerance: z
          .union(
            [z.number(), z.string(), z.strictObject({ sigma: number('Standard deviation of a normal spread.') })],
            { error: 'a number (± limit), an expression, or { sigma: number }' },
          )
          .optional()
          .meta({ description: '± limit of a uniform spread, or { sigma } of a normal one.' }),
      }),
    ],
    { error: KNOB },
  )
  .meta({ description: 'A named number that expressions may use: a value, or { value, range, tolerance }.' });

export const deviceSchema = z
  .strictObject({
    wavewell: z.literal(FORMAT_VERSION).meta({ description: 'Version of this format: 1.' }),
    title: z.string().optional().meta({ description: 'One line that says what the device is.' }),
    length: z
      .enum(['none', 'nm', 'um', 'mm', 'cm', 'm'])
      .optional()
      .meta({ description: 'Unit of every length in the file; none (dimensionless) if absent.' }),
    polarization: z
      .enum(['Ez', 'Hz'])
      .meta({ description: 'Ez: electric field out of the plane. Hz: magnetic field out of the plane.' }),
    band,
    knobs: z
      .record(z.string().regex(KNOB_NAME), knob)
      .optional()
      .meta({ description: 'Named numbers. Any number in the file may be an expression of them.' }),
    materials: z
      .record(z.string().regex(NAME), material)
      .optional()
      .meta({ description: 'Materials by name; "vacuum" is built in.' }),
    background: name('Material that surrounds everything; vacuum if absent. It must be lossless.').optional(),
    bodies: z
      .array(body)
      .meta({ description: 'The bodies; a later one covers an earlier one. A space with walls may be empty.' }),
    enclosure: enclosure.optional(),
    guides: z.array(guide).min(1).optional().meta({ description: 'Guides that run to infinity.' }),
    sheets: z.array(sheet).min(1).optional().meta({ description: 'Walls without thickness.' }),
    symmetry: z.array(symmetry).min(1).max(2).optional().meta({ description: 'Lines that halve the work.' }),
    pump: z
      .strictObject({
        bodies: z
          .record(z.string(), number('Weight, above 0.'))
          .meta({ description: 'Weight of each active body, array, scatter or member such as posts[3].' }),
      })
      .optional()
      .meta({ description: 'Which bodies gain (or absorb): pump D makes their permittivity ε − iD·weight.' }),
  })
  .meta({
    title: 'Wavewell device file',
    description: 'A two-dimensional resonator: band, materials, bodies, walls, guides, pump.',
  });

export type DeviceInput = z.output<typeof deviceSchema>;
export type BodyInput = z.output<typeof body>;
export type ShapesInput = z.output<typeof region>;
export type ArrayInput = z.output<typeof array>;
export type ScatterInput = z.output<typeof scatter>;
export type MaterialInput = z.output<typeof material>;
export type KnobInput = z.output<typeof knob>;
export type EnclosureInput = z.output<typeof enclosure>;
export type GuideInput = z.output<typeof guide>;
export type SheetInput = z.output<typeof sheet>;
export type SymmetryInput = z.output<typeof symmetry>;
export type BandInput = z.output<typeof band>;
