/** Shells of equal radius around the Earth that heights are sorted by. */
export const SHELLS = 4096;
const FINE_SHELLS_FROM_KM = 6200;
const FINE_SHELLS_TO_KM = 9400;
const FINE_PER_KM = 1;
const FINE_SHELLS = (FINE_SHELLS_TO_KM - FINE_SHELLS_FROM_KM) * FINE_PER_KM;
const COARSE_SHELL_KM = 80;

/** Number of the shell that holds a radius: never falling with the radius, 1 km thick in low orbit. */
export function shellOf(radiusKm: number): number {
  const shell =
    radiusKm < FINE_SHELLS_TO_KM
      ? (radiusKm - FINE_SHELLS_FROM_KM) * FINE_PER_KM
      : FINE_SHELLS + (radiusKm - FINE_SHELLS_TO_KM) / COARSE_SHELL_KM;
  return shell < 0 ? 0 : shell >= SHELLS ? SHELLS - 1 : Math.floor(shell);
}
