/** Steps that a slab can be cut into. */
const STEPS_S = [20, 24, 30, 36, 40, 48, 60, 72, 80, 90, 96, 120, 150, 160, 180, 200, 240, 300];
/** Step that the cost of looking at pairs is measured at. */
export const TRIAL_STEP_S = 120;
/** Cost of stepping an object against that of a look at four pairs: sets the step, not the result. */
const OBJECT_COST = 20;

export const SHORTEST_STEP_S = STEPS_S[0];
export const LONGEST_STEP_S = STEPS_S[STEPS_S.length - 1];

/**
 * The step that costs least: looking at pairs grows with the square of the step (the area that a cell
 * covers), stepping the objects falls with it. It depends on the objects alone, so that the work is the same
 * on every machine.
 *
 * @param visits looks at pairs in one step of `TRIAL_STEP_S`
 */
export function cheapestStepS(objectCount: number, visits: number): number {
  const best = TRIAL_STEP_S * Math.sqrt((OBJECT_COST * objectCount) / Math.max(1, visits));
  return STEPS_S.reduce((a, b) => (Math.abs(b - best) < Math.abs(a - best) ? b : a));
}
