/** Stands in every output: what the figures are, and who decides. */
export const CAUTION =
  'Screening aid on public elements: decide maneuvers on the official screening service and licensed flight-dynamics practice';
