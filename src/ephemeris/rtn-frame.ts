import { cross, type Matrix3, norm, scale, type Vector3 } from '../vector.js';

/**
 * The RTN frame of an orbit state: R along the position, N along position x velocity, T = N x R
 * (CCSDS 508.0-B-1, annex on frames).
 *
 * @param position any length unit
 * @param velocity any speed unit, same inertial frame
 * @returns rows R, T, N: the matrix that takes inertial components to RTN components
 */
export function rtnFrame(position: Vector3, velocity: Vector3): Matrix3 {
  const radial = scale(position, 1 / norm(position));
  const momentum = cross(position, velocity);
  const normal = scale(momentum, 1 / norm(momentum));
  return [radial, cross(normal, radial), normal];
}
