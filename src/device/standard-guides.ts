// Which inner width and band has a standard rectangular guide?

/** A standard guide: names, broad inner side in mm, recommended band in GHz. */
export interface StandardGuide {
  /** EIA name. */
  readonly name: string;
  /** IEC name. */
  readonly iec: string;
  /** Broad inner side, mm (exact conversion of inches). */
  readonly width: number;
  /** Narrow inner side, mm. */
  readonly height: number;
  /** Recommended band, GHz. */
  readonly band: readonly [number, number];
}

/**
 * EIA RS-261-B (1979) and IEC 60153-2:2016. The number in an EIA name is the broad side in hundredths of an inch, rounded:
 * the exact sides are these. Sides from a public chart in inches; bands to WR-62 from the same, above it from memory.
 */
const TABLE: readonly (readonly [string, string, number, number, number, number])[] = [
  ['WR-430', 'R22', 109.22, 54.61, 1.7, 2.6],
  ['WR-340', 'R26', 86.36, 43.18, 2.2, 3.3],
  ['WR-284', 'R32', 72.136, 34.036, 2.6, 3.95],
  ['WR-229', 'R40', 58.166, 29.083, 3.3, 4.9],
  ['WR-187', 'R48', 47.5488, 22.1488, 3.95, 5.85],
  ['WR-159', 'R58', 40.386, 20.193, 4.9, 7.05],
  ['WR-137', 'R70', 34.8488, 15.7988, 5.85, 8.2],
  ['WR-112', 'R84', 28.4988, 12.6238, 7.05, 10],
  ['WR-90', 'R100', 22.86, 10.16, 8.2, 12.4],
  ['WR-75', 'R120', 19.05, 9.525, 10, 15],
  ['WR-62', 'R140', 15.7988, 7.8994, 12.4, 18],
  ['WR-51', 'R180', 12.954, 6.477, 15, 22],
  ['WR-42', 'R220', 10.668, 4.318, 18, 26.5],
  ['WR-34', 'R260', 8.636, 4.318, 22, 33],
  ['WR-28', 'R320', 7.112, 3.556, 26.5, 40],
  ['WR-22', 'R400', 5.6896, 2.8448, 33, 50],
  ['WR-15', 'R620', 3.7592, 1.8796, 50, 75],
  ['WR-12', 'R740', 3.0988, 1.5494, 60, 90],
  ['WR-10', 'R900', 2.54, 1.27, 75, 110],
];

export const STANDARD_GUIDES: readonly StandardGuide[] = TABLE.map(([name, iec, width, height, low, high]) => ({
  name,
  iec,
  width,
  height,
  band: [low, high],
}));

/** The guide of an EIA or IEC name, written with or without dash and in any case; undefined if none. */
export function standardGuide(name: string): StandardGuide | undefined {
  const plain = (text: string): string => text.toUpperCase().replaceAll(/[\s-]/g, '');
  return STANDARD_GUIDES.find((g) => plain(g.name) === plain(name) || plain(g.iec) === plain(name));
}
