import type { ContainerPhysics } from '../../config/schema/product.js'
import { Refusal } from '../../config/schema/refusal.js'

/** Density taken for the volume of a fill, kg/m³: within a quarter for all that is stored here. */
const fillDensity_kg_m3 = 1000

/** Volume of the fill of one container, m³. */
export function fillVolume_m3(c: ContainerPhysics): number {
  return c.fill_kg / fillDensity_kg_m3
}

/** Heat capacity of the wall per kg of product, kJ/(kg K). */
export function wallShare_kJ_kgK(c: ContainerPhysics): number {
  return c.wall_kJ_K / c.fill_kg
}

const needed = (value: number | undefined, c: ContainerPhysics, field: string): number => {
  if (value !== undefined) return value
  throw new Refusal(
    'missing',
    field,
    value,
    `the area of a ${c.shape} needs it`,
    'give it in metres, or give UA_W_K instead of h_W_m2K',
  )
}

/**
 * Area through which one container exchanges heat.
 *
 *     cylinder 2πr(r + h)   sphere 4πr²   box 2(lw + lh + wh)   slab 2V/thickness (both faces)
 *
 * @returns m²
 * @throws  Refusal 'missing' for a length that the shape needs, or for the shape
 */
export function area_m2(c: ContainerPhysics): number {
  switch (c.shape) {
    case 'cylinder': {
      const r = needed(c.radius_m, c, 'radius_m')
      return 2 * Math.PI * r * (r + needed(c.height_m, c, 'height_m'))
    }
    case 'sphere':
      return 4 * Math.PI * needed(c.radius_m, c, 'radius_m') ** 2
    case 'box': {
      const l = needed(c.length_m, c, 'length_m')
      const w = needed(c.width_m, c, 'width_m')
      const h = needed(c.height_m, c, 'height_m')
      return 2 * (l * w + l * h + w * h)
    }
    case 'slab':
      return (2 * fillVolume_m3(c)) / needed(c.thickness_m, c, 'thickness_m')
    case undefined:
      throw new Refusal(
        'missing',
        'shape',
        undefined,
        'an area needs a shape',
        'give the shape and its lengths, or give UA_W_K instead of h_W_m2K',
      )
  }
}

/**
 * Coupling of one container to its surroundings.
 *
 *     UA as given, or h × area
 *
 * @returns W/K and its relative standard uncertainty; null where neither is given
 * @throws  Refusal 'missing' where h is given and the area cannot be had
 */
export function couplingOf(
  c: ContainerPhysics,
): { readonly UA_W_K: number; readonly relU: number } | null {
  if (c.UA_W_K !== undefined) return { UA_W_K: c.UA_W_K, relU: c.UA_relU }
  if (c.h_W_m2K === undefined) return null
  return { UA_W_K: c.h_W_m2K * area_m2(c), relU: c.UA_relU }
}
