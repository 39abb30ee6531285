/** Stands in every output: what the figures are, and who decides. */
export const CAUTION =
  'Screening aid on public elements: decide maneuvers on the official screening service and licensed flight-dynamics practice';

/** The same for whatever is about a launch. */
export const LAUNCH_CAUTION = `${CAUTION}; launch collision avoidance is decided by the launch range and the official service`;
