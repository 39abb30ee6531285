// Nodes and weights of the 15-point Kronrod rule and its 7-point Gauss rule: R. Piessens et al.,
// QUADPACK, Springer 1983.
const KRONROD_NODES = [
  0.9914553711208126, 0.9491079123427585, 0.8648644233597691, 0.7415311855993945, 0.5860872354676911,
  0.4058451513773972, 0.20778495500789848, 0,
] as const;
const KRONROD_WEIGHTS = [
  0.022935322010529224, 0.06309209262997856, 0.10479001032225019, 0.14065325971552592, 0.1690047266392679,
  0.19035057806478542, 0.20443294007529889, 0.20948214108472782,
] as const;
const GAUSS_WEIGHTS = [
  0.1294849661688697, 0.27970539148927664, 0.3818300505051189, 0.4179591836734694,
] as const;

/** Enough for anything smooth; beyond it only rounding noise is left to chase. */
const MAX_PIECES = 200;

type Piece = { readonly from: number; readonly to: number; readonly value: number; readonly error: number };

/**
 * Adaptive integral of a function without sign changes over consecutive intervals: the piece with the
 * largest error estimate is halved until the sum of the estimates is small enough.
 *
 * @param bounds ends of the intervals, rising; place them where the function peaks or bends
 * @param relativeTolerance of the whole integral
 */
export function integrate(
  f: (x: number) => number,
  bounds: readonly number[],
  relativeTolerance: number,
): number {
  const pieces: Piece[] = [];
  let value = 0;
  let error = 0;
  for (let i = 0; i + 1 < bounds.length; i++) {
    const piece = kronrod(f, bounds[i], bounds[i + 1]);
    pieces.push(piece);
    value += piece.value;
    error += piece.error;
  }
  while (error > relativeTolerance * Math.abs(value) && pieces.length < MAX_PIECES) {
    let worst = 0;
    for (let i = 1; i < pieces.length; i++) if (pieces[i].error > pieces[worst].error) worst = i;
    const { from, to } = pieces[worst];
    const middle = 0.5 * (from + to);
    if (!(middle > from && middle < to)) break;
    pieces[worst] = kronrod(f, from, middle);
    pieces.push(kronrod(f, middle, to));
    value = 0;
    error = 0;
    for (const piece of pieces) {
      value += piece.value;
      error += piece.error;
    }
  }
  return value;
}

function kronrod(f: (x: number) => number, from: number, to: number): Piece {
  const middle = 0.5 * (from + to);
  const half = 0.5 * (to - from);
  const atMiddle = f(middle);
  let fine = KRONROD_WEIGHTS[7] * atMiddle;
  let coarse = GAUSS_WEIGHTS[3] * atMiddle;
  for (let i = 0; i < 7; i++) {
    const step = half * KRONROD_NODES[i];
    const pair = f(middle - step) + f(middle + step);
    fine += KRONROD_WEIGHTS[i] * pair;
    if (i % 2 === 1) coarse += GAUSS_WEIGHTS[(i - 1) / 2] * pair;
  }
  return { from, to, value: fine * half, error: Math.abs(fine - coarse) * half };
}

type Rule = { readonly nodes: readonly number[]; readonly weights: readonly number[] };
const LEGENDRE = new Map<number, Rule>();

/** Gauss-Legendre nodes and weights for -1 to 1, by Newton's method on the Legendre polynomial. */
export function legendreRule(count: number): Rule {
  let rule = LEGENDRE.get(count);
  if (rule !== undefined) return rule;
  const nodes: number[] = [];
  const weights: number[] = [];
  for (let i = 0; i < count; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (count + 0.5));
    let slope = 0;
    for (let step = 0; step < 12; step++) {
      let value = 1;
      let before = 0;
      for (let n = 1; n <= count; n++) {
        const next = ((2 * n - 1) * x * value - (n - 1) * before) / n;
        before = value;
        value = next;
      }
      slope = (count * (x * value - before)) / (x * x - 1);
      x -= value / slope;
    }
    nodes.push(x);
    weights.push(2 / ((1 - x * x) * slope * slope));
  }
  rule = { nodes, weights };
  LEGENDRE.set(count, rule);
  return rule;
}
