import { recordStateAt } from './record-states.js';
import type { Sgp4Records } from './sgp4-records.js';
import type { OrbitState } from './state.js';

/**
 * Length of a piece: a minute to either side of its middle and some more, which is all that most encounters ask
 * for. The seventh power of the arc that a low orbit flies in half of it leaves no error that shows.
 */
const PIECE_MS = 130_000;
const NODES = 7;

/** Chebyshev points of the second kind on -1 to 1, and their weights in the barycentric formula. */
const POINTS = Float64Array.from({ length: NODES }, (_, k) => Math.cos((Math.PI * k) / (NODES - 1)));
const WEIGHTS = Float64Array.from(
  { length: NODES },
  (_, k) => (k % 2 === 0 ? 1 : -1) * (k === 0 || k === NODES - 1 ? 0.5 : 1),
);

/**
 * SGP4 around one time for someone who asks often: states at Chebyshev points of pieces two minutes long,
 * joined by polynomials of degree six (barycentric formula; Berrut and Trefethen, SIAM Review 46, 2004).
 * In the lowest orbits it is off SGP4 by less than a millimeter. Pieces are made when first needed.
 *
 * @param centerMs the middle of a piece
 * @returns the state at a time, or `undefined` where SGP4 gives none in that piece
 */
export function createShortArc(
  records: Sgp4Records,
  place: number,
  centerMs: number,
): (timeMs: number) => OrbitState | undefined {
  const pieces = new Map<number, Float64Array | undefined>();
  return (timeMs) => {
    const number = Math.round((timeMs - centerMs) / PIECE_MS);
    const middleMs = centerMs + number * PIECE_MS;
    if (!pieces.has(number)) pieces.set(number, pieceAround(records, place, middleMs));
    const states = pieces.get(number);
    return states === undefined ? undefined : interpolated(states, (2 * (timeMs - middleMs)) / PIECE_MS);
  };
}

function pieceAround(records: Sgp4Records, place: number, middleMs: number): Float64Array | undefined {
  const states = new Float64Array(6 * NODES);
  for (let k = 0; k < NODES; k++) {
    const timeMs = middleMs + (POINTS[k] * PIECE_MS) / 2;
    if (!recordStateAt(records, place, timeMs, states, 6 * k)) return undefined;
  }
  return states;
}

function interpolated(states: Float64Array, x: number): OrbitState {
  let sum = 0;
  let rx = 0;
  let ry = 0;
  let rz = 0;
  let vx = 0;
  let vy = 0;
  let vz = 0;
  for (let k = 0; k < NODES; k++) {
    const away = x - POINTS[k];
    // At a node the formula is 0/0: the node's weight then outweighs all others.
    const weight = WEIGHTS[k] / (away === 0 ? 1e-300 : away);
    const at = 6 * k;
    sum += weight;
    rx += weight * states[at];
    ry += weight * states[at + 1];
    rz += weight * states[at + 2];
    vx += weight * states[at + 3];
    vy += weight * states[at + 4];
    vz += weight * states[at + 5];
  }
  return {
    positionKm: [rx / sum, ry / sum, rz / sum],
    velocityKmPerS: [vx / sum, vy / sum, vz / sum],
  };
}
