// Do expressions of knobs give the values of arithmetic, and faults their column?

import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { ExpressionError, evaluateExpression, namesIn, parseExpression } from '../../src/device/expression.ts';

const knobs = new Map([
  ['radius', 3],
  ['gap', 0.25],
  ['größe_2', 5],
]);
const value = (text: string): number => evaluateExpression(parseExpression(text), knobs);

function fault(text: string): ExpressionError {
  try {
    value(text);
  } catch (error) {
    if (error instanceof ExpressionError) return error;
    throw error;
  }
  throw new Error(`no fault in ${text}`);
}

describe('values', () => {
  test.each([
    ['1', 1],
    ['1.5e-3', 0.0015],
    ['.5', 0.5],
    ['5.', 5],
    ['2 + 3*4', 14],
    ['(2 + 3)*4', 20],
    ['2 - 3 - 4', -5],
    ['12/3/2', 2],
    ['2^3^2', 512],
    ['-2^2', -4],
    ['2^-1', 0.5],
    ['--3', 3],
    ['+3 - -3', 6],
    ['2*-3', -6],
    ['radius + gap', 3.25],
    ['-(radius + gap + 0.2)', -3.45],
    ['größe_2', 5],
    ['pi', Math.PI],
    ['sqrt(16)', 4],
    ['sin(pi/2)', 1],
    ['abs(-radius)', 3],
    ['log(exp(2))', 2],
    ['min(3, 1, 2)', 1],
    ['max(radius, gap)', 3],
  ])('%s', (text, expected) => {
    expect(value(text)).toBeCloseTo(expected, 14);
  });

  test('agree with the arithmetic of the language on random sums and products', () => {
    const number = fc.double({ min: 0.01, max: 100, noNaN: true });
    const operator = fc.constantFrom('+', '-', '*', '/');
    fc.assert(
      fc.property(number, operator, number, operator, number, (a, o, b, p, c) => {
        const [x, y, z] = [a, b, c].map((v) => v.toFixed(6)).map(Number) as [number, number, number];
        const apply = (u: number, op: string, v: number): number =>
          op === '+' ? u + v : op === '-' ? u - v : op === '*' ? u * v : u / v;
        const tight = '*/'.includes(p) && '+-'.includes(o);
        const expected = tight ? apply(x, o, apply(y, p, z)) : apply(apply(x, o, y), p, z);
        expect(value(`${x} ${o} ${y} ${p}${z}`)).toBe(expected);
      }),
    );
  });

  test('names in use are listed with their column', () => {
    expect([...namesIn(parseExpression('sin(gap)*radius + gap'))]).toEqual([
      ['gap', 5],
      ['radius', 10],
    ]);
  });
});

describe('faults', () => {
  test.each([
    ['', 1, 'it ends too early'],
    ['2 +', 4, 'it ends too early'],
    ['2 + * 3', 5, 'unexpected *'],
    ['2 ** 3', 4, 'unexpected *'],
    ['2 3', 3, 'unexpected 3'],
    ['(2 + 3', 7, 'the ( of column 1 is not closed'],
    ['2)', 2, 'unexpected )'],
    ['2 $ 3', 3, 'unexpected $'],
    ['foo(2)', 1, 'unknown function foo'],
    ['constructor(2)', 1, 'unknown function constructor'],
    ['2*sin', 3, 'sin without ( )'],
    ['sqrt(1, 2)', 1, 'sqrt with 2 values'],
    ['max(1)', 1, 'max with 1 value'],
    ['1/0', 2, 'a division by zero'],
    ['1 + sqrt(-1)', 5, 'sqrt of -1'],
    ['log(0)', 1, 'log of 0'],
    ['(-8)^(1/3)', 5, '-8 ^'],
    ['1e400', 1, 'a number too large'],
    ['10^400', 3, '10 ^ 400'],
    ['1 + toString', 5, 'unknown knob toString'],
    ['3 um', 3, 'unexpected um'],
    ['('.repeat(2000), 1, '2000 characters'],
  ])('%s', (text, column, reason) => {
    const error = fault(text);
    expect(error.message).toContain(reason);
    expect(error.column).toBe(column);
    expect(error.expected).not.toBe('');
    expect(error.mend).not.toBe('');
  });

  test('any text gives a finite number or an ExpressionError', () => {
    const piece = fc.constantFrom(...'0123456789.+-*/^(),eE pi radius sqrt max $é'.split(''), 'sin(', 'radius', '1e9');
    fc.assert(
      fc.property(
        fc.oneof(
          fc.string(),
          fc.array(piece).map((p) => p.join('')),
        ),
        (text) => {
          try {
            expect(Number.isFinite(value(text))).toBe(true);
          } catch (error) {
            expect(error).toBeInstanceOf(ExpressionError);
          }
        },
      ),
    );
  });
});
