export {
  assessEncounter,
  type Encounter,
  type EncounterAssessment,
  type EncounterObject,
} from './probability/assess-encounter.js';
export { type FosterEncounter, fosterProbability } from './probability/foster.js';
export type { Matrix3, Vector3 } from './vector.js';
