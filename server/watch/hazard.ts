import {
  type Ahead,
  chanceOf,
  type Exposure,
  expose,
  noExposure,
  stillLiquid,
} from '../physics/nucleation.js'
import type { Matter } from './matter.js'

/** Exposure after a stretch on which the depth goes in a straight line; the same one where none came. */
export function exposed(
  m: Matter,
  before: Exposure,
  from_K: number,
  to_K: number,
  dt_s: number,
): Exposure {
  if ((from_K <= 0 && to_K <= 0) || dt_s <= 0) return before
  const after = before.length > 0 ? [...before] : noExposure(m.kinetics)
  expose(m.kinetics, after, from_K, to_K, dt_s)
  return after
}

/** Chance that one container stays liquid through an exposure, over all that is believed. */
export const aliveAfter = (m: Matter, exposure: Exposure): number =>
  stillLiquid(m.kinetics, exposure)

/**
 * Chances of one container and of any of so many over an exposure: low, middle and high.
 *
 * @param survived  exposure through which the watched one stayed liquid; zeros where nobody could see
 */
export const chancesOver = (
  m: Matter,
  survived: Exposure,
  ahead: readonly Ahead[],
  count: number,
): { one: [number, number, number]; any: [number, number, number] } => {
  const { one, any } = chanceOf(
    m.kinetics,
    survived,
    survived === m.noExposure ? 0 : 1,
    ahead,
    count,
  )
  return { one: [...one], any: [...any] }
}
