import type { ScreeningVolume } from '../encounters/volume.js';
import { InputError } from '../input-error.js';
import type { Vector3 } from '../vector.js';

/** What the options of every screening say about its volume. */
type VolumeValues = {
  readonly 'miss-km': number | undefined;
  readonly 'volume-rtn-km': Vector3 | undefined;
  readonly 'volume-shape': 'BOX' | 'ELLIPSOID' | undefined;
};

/** @throws InputError for a shape without a size */
export function volumeOf(values: VolumeValues, defaultMissKm: number): ScreeningVolume {
  const halfSizeRtnKm = values['volume-rtn-km'];
  if (halfSizeRtnKm !== undefined) return { shape: values['volume-shape'] ?? 'BOX', halfSizeRtnKm };
  if (values['volume-shape'] !== undefined) {
    throw new InputError(
      `--volume-shape is ${values['volume-shape']}, but its size is missing: give --volume-rtn-km R,T,N`,
    );
  }
  return { shape: 'SPHERE', missKm: values['miss-km'] ?? defaultMissKm };
}
