// Do the dense complex solvers agree with a general-purpose real library on real matrices?

import { EigenvalueDecomposition, Matrix, SingularValueDecomposition } from 'ml-matrix';
import { expect, test } from 'vitest';
import { eigenGeneral } from '../../src/numerics/eigenvalues.ts';
import { luFactor } from '../../src/numerics/lu.ts';
import { randomStream } from '../../src/numerics/random.ts';
import { singularValues } from '../../src/numerics/singular-values.ts';

function realMatrix(n: number, seed: number): { rows: number[][]; columns: Float64Array } {
  const random = randomStream(seed);
  const rows = Array.from({ length: n }, () => Array.from({ length: n }, () => random.normal()));
  const columns = new Float64Array(2 * n * n);
  rows.forEach((row, i) => {
    row.forEach((value, j) => {
      columns[2 * (i + j * n)] = value;
    });
  });
  return { rows, columns };
}

// ml-matrix 6.15: Householder and QR on real matrices, residual 2e-13
test('eigenvalues of a real matrix', () => {
  const { rows, columns } = realMatrix(40, 1);
  const oracle = new EigenvalueDecomposition(new Matrix(rows));
  const { values } = eigenGeneral(columns, 40);
  oracle.realEigenvalues.forEach((re, i) => {
    const im = oracle.imaginaryEigenvalues[i];
    const distances = Array.from({ length: 40 }, (_, j) => Math.hypot(values[2 * j] - re, values[2 * j + 1] - im));
    expect(Math.min(...distances)).toBeLessThan(1e-11);
  });
});

test('singular values of a real matrix', () => {
  const { rows, columns } = realMatrix(30, 2);
  const oracle = [...new SingularValueDecomposition(new Matrix(rows)).diagonal].sort((a, b) => b - a);
  const own = [...singularValues(columns, 30, 30)].sort((a, b) => b - a);
  own.forEach((value, i) => {
    expect(Math.abs(value - oracle[i])).toBeLessThan(1e-12 * oracle[0]);
  });
});

test('the determinant is the product of the eigenvalues', () => {
  const { columns } = realMatrix(25, 3);
  const { values } = eigenGeneral(columns, 25);
  let log = 0;
  for (let i = 0; i < 25; i++) log += Math.log(Math.hypot(values[2 * i], values[2 * i + 1]));
  expect(Math.abs(luFactor(columns, 25).logDeterminant.re - log)).toBeLessThan(1e-11);
});
