import type { Container } from '../../config/schema/product.js'

/** Conductivity of watery liquids at rest, W/(m K); convection only makes the gradient smaller. */
const conductivity_W_mK = 0.55
/** Centre less mean for an even heat flux: q·r/(nk), n = 4 cylinder, 5 sphere, 3 slab (per half). */
const shapeNumber = { cylinder: 4, sphere: 5, slab: 3, box: 4 } as const

/** Reach of the cold from the outside in, m. */
const reachOf_m = (c: Container): number =>
  c.shape === 'slab'
    ? (c.thickness_m ?? 0.04) / 2
    : c.shape === 'box'
      ? Math.min(c.length_m ?? 1, c.width_m ?? 1, c.height_m ?? 1) / 2
      : (c.radius_m ?? 0.02)

/** Diffusivity of watery liquids, m²/s. */
const diffusivity_m2_s = 1.4e-7

/**
 * Time in which a change outside reaches the inside by conduction, r²/(6 a).
 *
 * @returns  s, 60 … 4 h
 */
export const settlingOf = (c: Container): number =>
  Math.min(14_400, Math.max(60, reachOf_m(c) ** 2 / (6 * diffusivity_m2_s)))

/** Steeper than this no lumped body can be spoken of. */
const steepest = 0.4

/**
 * How far the centre of a body stays behind its mean, per kelvin between body and surroundings.
 *
 *     (T_c − T̄)/(T̄ − T_env) = (UA/A) · r / (n k)
 *
 * @returns  0 … 0.4; 0.05 where the shape is not known
 * @source   quasi-steady conduction in a plate, cylinder or sphere (Carslaw, Jaeger 1959)
 */
export function gradientOf(c: Container, UA_W_K: number, area_m2: number | null): number {
  if (c.shape === undefined || area_m2 === null || area_m2 <= 0) return 0.05
  const reach_m = reachOf_m(c)
  const film = UA_W_K / area_m2
  return Math.min(steepest, (film * reach_m) / (shapeNumber[c.shape] * conductivity_W_mK))
}
