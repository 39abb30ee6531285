/** Shells of equal radius around the Earth that heights are sorted by. */
export const SHELLS = 8192;
const FINE_SHELLS_FROM_KM = 6200;
const FINE_SHELLS_TO_KM = 9400;
const FINE_PER_KM = 2;
const FINE_SHELLS = (FINE_SHELLS_TO_KM - FINE_SHELLS_FROM_KM) * FINE_PER_KM;
const COARSE_SHELL_KM = 80;

/** Number of the shell that holds a radius: never falling with the radius, half a kilometer thick in low orbit. */
export function shellOf(radiusKm: number): number {
  const shell =
    radiusKm < FINE_SHELLS_TO_KM
      ? (radiusKm - FINE_SHELLS_FROM_KM) * FINE_PER_KM
      : FINE_SHELLS + (radiusKm - FINE_SHELLS_TO_KM) / COARSE_SHELL_KM;
  return shell < 0 ? 0 : shell >= SHELLS ? SHELLS - 1 : Math.floor(shell);
}

/** Lower edge of a shell, km; nothing that is above ground lies below the lowest. */
export function shellFloorKm(shell: number): number {
  return shell < FINE_SHELLS
    ? FINE_SHELLS_FROM_KM + shell / FINE_PER_KM
    : FINE_SHELLS_TO_KM + (shell - FINE_SHELLS) * COARSE_SHELL_KM;
}
