import type { Container } from '../../config/schema/product.js'

/** Conductivity of watery liquids at rest, W/(m K); convection only makes the gradient smaller. */
const conductivity_W_mK = 0.55
/** Centre less mean for an even heat flux: q·r/(nk), n = 4 cylinder, 5 sphere, 3 slab (per half). */
const shapeNumber = { cylinder: 4, sphere: 5, slab: 3, box: 4 } as const

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
  const reach_m =
    c.shape === 'slab'
      ? (c.thickness_m ?? 0) / 2
      : c.shape === 'box'
        ? Math.min(c.length_m ?? 1, c.width_m ?? 1, c.height_m ?? 1) / 2
        : (c.radius_m ?? 0)
  const film = UA_W_K / area_m2
  return Math.min(steepest, (film * reach_m) / (shapeNumber[c.shape] * conductivity_W_mK))
}
