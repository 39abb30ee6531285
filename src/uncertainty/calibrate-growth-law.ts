/**
 * Powers of the age in the variance. A cause can be named for the whole ones: 0 the noise of the fits, 1 a
 * random walk (of the radius when drag fluctuates), 2 a wrong mean motion or a drift of the plane, 3 white
 * noise of drag integrated twice along the orbit, 4 a steadily wrong drag term. The halves between them let
 * the sum follow any growth in between within a few percent. None below 1: it could not be told from 0,
 * which decides what a set is worth at its epoch.
 */
const POWERS: readonly number[] = [0, 1, 1.5, 2, 2.5, 3, 3.5, 4];
const MAX_STEPS = 50;
/** Relative, of the variances. */
const CONVERGED = 1e-5;
const SMALLEST_VARIANCE_M2 = 1e-6;

/** What was measured at one age. */
export type GrowthPoint = {
  readonly ageDays: number;
  /** Robust one-sigma of the differences, meters. */
  readonly sigmaM: number;
  /** How much the point counts: the number of independent differences behind it. */
  readonly weight: number;
};

/**
 * Variance of a difference of two sets by the age of the older one: the sum of the coefficients (m^2, days)
 * times `POWERS` of the age, none negative, so that it never shrinks. The first is the variance at age 0.
 */
export type GrowthLaw = { readonly coefficients: readonly number[] };

/**
 * Fits a sum of powers of the age, no coefficient negative, to the squared sigmas.
 *
 * What never falls by its form needs no rule that pools neighboring bins (as monotone regression does),
 * which would leave steps, follow the noise of single bins and say nothing about age 0.
 *
 * Each point is weighted by its relative error, found by iterating on the fitted values, not the measured
 * ones (which would favor bins that came out low by chance); a squared scale estimate has a relative error
 * independent of its size, as in a gamma regression (McCullagh and Nelder, Generalized Linear Models, ch. 8).
 *
 * @param points at least one, ages above zero
 */
export function fitGrowthLaw(points: readonly GrowthPoint[]): GrowthLaw {
  if (points.length === 0) throw new RangeError('no points to fit a growth law to');
  for (const { ageDays, sigmaM, weight } of points) {
    if (!(ageDays > 0 && sigmaM >= 0 && weight > 0 && Number.isFinite(ageDays + sigmaM + weight))) {
      throw new RangeError(`growth point of age ${ageDays} d, sigma ${sigmaM} m, weight ${weight}`);
    }
  }
  const unitDays = Math.max(...points.map((point) => point.ageDays));
  const ages = points.map((point) => point.ageDays / unitDays);
  const measured = points.map((point) => Math.max(point.sigmaM ** 2, SMALLEST_VARIANCE_M2));
  let fitted = measured;
  let coefficients: readonly number[] = [];
  for (let step = 0; step < MAX_STEPS; step++) {
    const weights = points.map((point, i) => point.weight / fitted[i] ** 2);
    coefficients = nonNegativeLeastSquares(ages, measured, weights);
    const next = ages.map((age) => Math.max(valueAt(coefficients, age), SMALLEST_VARIANCE_M2));
    const change = Math.max(...next.map((value, i) => Math.abs(value / fitted[i] - 1)));
    fitted = next;
    if (change < CONVERGED) break;
  }
  return { coefficients: coefficients.map((value, j) => value / unitDays ** POWERS[j]) };
}

/** One-sigma of the difference of two sets when the older one has this age, meters. */
export function differenceSigmaM(law: GrowthLaw, ageDays: number): number {
  return Math.sqrt(valueAt(law.coefficients, ageDays));
}

/**
 * One-sigma of a single set at this age, meters.
 *
 * A difference carries the errors of both sets, the newer one's at its own epoch: for independent errors
 * var(difference at age t) = var(t) + var(0), hence var(difference at 0) = 2 var(0), which is c0. Half of
 * c0 is therefore taken off at every age.
 */
export function setSigmaM(law: GrowthLaw, ageDays: number): number {
  return Math.sqrt(valueAt(law.coefficients, ageDays) - law.coefficients[0] / 2);
}

function valueAt(coefficients: readonly number[], x: number): number {
  return coefficients.reduce((sum, coefficient, j) => sum + coefficient * x ** POWERS[j], 0);
}

/** Weighted least squares without negative coefficients, by the active sets of Lawson and Hanson, Solving Least Squares Problems, 1974, ch. 23. */
function nonNegativeLeastSquares(
  x: readonly number[],
  y: readonly number[],
  weights: readonly number[],
): readonly number[] {
  const rows = x.map((value, i) => POWERS.map((power) => value ** power * Math.sqrt(weights[i])));
  const target = y.map((value, i) => value * Math.sqrt(weights[i]));
  const lengths = POWERS.map((_, j) => Math.hypot(...rows.map((row) => row[j])));
  const normal = POWERS.map((_, j) =>
    POWERS.map((__, k) => rows.reduce((sum, row) => sum + row[j] * row[k], 0) / (lengths[j] * lengths[k])),
  );
  const right = POWERS.map((_, j) => rows.reduce((sum, row, i) => sum + row[j] * target[i], 0) / lengths[j]);
  const tolerance = 1e-10 * Math.max(...right);
  const solution = POWERS.map(() => 0);
  let chosen: number[] = [];
  const refused = new Set<number>();
  for (let step = 0; step < MAX_STEPS && chosen.length < x.length; step++) {
    const gradient = POWERS.map((_, j) =>
      chosen.includes(j) || refused.has(j)
        ? 0
        : right[j] - chosen.reduce((sum, k) => sum + normal[j][k] * solution[k], 0),
    );
    const steepest = gradient.indexOf(Math.max(...gradient));
    if (gradient[steepest] <= tolerance) break;
    chosen.push(steepest);
    for (;;) {
      const free = solve(
        chosen.map((j) => chosen.map((k) => normal[j][k])),
        chosen.map((j) => right[j]),
      );
      // A power that cannot be told from the chosen ones, or that rounding drives out at once, adds nothing.
      if (free === undefined || (solution[steepest] === 0 && free[chosen.indexOf(steepest)] <= 0)) {
        chosen = chosen.filter((j) => j !== steepest);
        refused.add(steepest);
        break;
      }
      if (free.every((value) => value > 0)) {
        chosen.forEach((j, position) => {
          solution[j] = free[position];
        });
        break;
      }
      const stride = Math.min(
        ...chosen.map((j, position) =>
          free[position] > 0 ? 1 : solution[j] / (solution[j] - free[position]),
        ),
      );
      chosen.forEach((j, position) => {
        solution[j] += stride * (free[position] - solution[j]);
      });
      chosen = chosen.filter((j) => {
        const stays = solution[j] > 1e-14 * Math.max(...solution);
        if (!stays) solution[j] = 0;
        return stays;
      });
    }
  }
  return solution.map((value, j) => value / lengths[j]);
}

/** Solves a small symmetric system by elimination; `undefined` when it is singular to working precision. */
function solve(matrix: number[][], right: number[]): number[] | undefined {
  const size = right.length;
  const rows = matrix.map((row, i) => [...row, right[i]]);
  const scale = Math.max(...matrix.map((row, i) => Math.abs(row[i])));
  for (let column = 0; column < size; column++) {
    let pivot = column;
    for (let i = column + 1; i < size; i++) {
      if (Math.abs(rows[i][column]) > Math.abs(rows[pivot][column])) pivot = i;
    }
    if (Math.abs(rows[pivot][column]) <= 1e-14 * scale) return undefined;
    [rows[column], rows[pivot]] = [rows[pivot], rows[column]];
    for (let i = column + 1; i < size; i++) {
      const factor = rows[i][column] / rows[column][column];
      for (let k = column; k <= size; k++) rows[i][k] -= factor * rows[column][k];
    }
  }
  for (let i = size - 1; i >= 0; i--) {
    for (let k = i + 1; k < size; k++) rows[i][size] -= rows[i][k] * rows[k][size];
    rows[i][size] /= rows[i][i];
  }
  return rows.map((row) => row[size]);
}
