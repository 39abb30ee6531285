const MS_PER_DAY = 86_400_000;
/** Neighboring sets share observations and weather: single sets held back would be as good as known. */
const BLOCK_DAYS = 15;
/** One block in so many is held back. */
const BLOCKS_PER_CYCLE = 5;

/** In words, for the report. */
export const HELD_BACK_RULE = `one block of ${BLOCK_DAYS} days in ${BLOCKS_PER_CYCLE}, which one depending on the object`;

/**
 * Whether a set is kept out of the fits, to check them. It depends on object and epoch alone: whole blocks of
 * time, at another phase for each object, so that a time of unusual drag is not all in one part.
 */
export function isHeldBack(designator: number, epochMs: number): boolean {
  const block = Math.floor(epochMs / (BLOCK_DAYS * MS_PER_DAY));
  return (((block + phaseOf(designator)) % BLOCKS_PER_CYCLE) + BLOCKS_PER_CYCLE) % BLOCKS_PER_CYCLE === 0;
}

/** The finalizer of MurmurHash3 (Appleby, public domain) mixes the bits of the number. */
function phaseOf(designator: number): number {
  let bits = designator >>> 0;
  bits = Math.imul(bits ^ (bits >>> 16), 0x85ebca6b);
  bits = Math.imul(bits ^ (bits >>> 13), 0xc2b2ae35);
  return ((bits ^ (bits >>> 16)) >>> 0) % BLOCKS_PER_CYCLE;
}
