import type { StorageUnitKind } from '../../config/schema/site.js'
import type { PlannedUnit } from './plan.js'
import { valueAt } from './plan.js'
import type { Jump } from './rivals.js'

/** How much the surroundings of an item differ from the air that serves it, K (watch.md §3). */
export const spreadOfPosition_K = { air: 0.9, buffer: 1.2, neighbour: 2, none: 8 }

/** How long a difference of position lasts: stock is moved about within the day, s. */
const position_s = 12 * 3600
/** Surroundings that nobody measures wander: K² per s, 1 K in an hour [common practice]. */
const wander_K2_s = 1 / 3600
/**
 * A probe on a wall feels them at once, and what it feels must not be taken for the product: 5 K in
 * an hour, which a door or a compressor easily makes.
 */
const felt_K2_s = 2 / 3600
/** Unmeasured surroundings are not less certain than this, K. */
const widest_K = 14

/** How the difference δ of an item from its air evolves over an interval. */
export function drift(
  source: 'air' | 'buffer' | 'neighbour' | 'none',
  stale: boolean,
  dt_s: number,
  variance_K2: number,
  onWall: boolean,
): { keep: number; deltaQ_K2: number } {
  if (source === 'none' || stale)
    return {
      keep: 1,
      deltaQ_K2: variance_K2 > widest_K * widest_K ? 0 : (onWall ? felt_K2_s : wander_K2_s) * dt_s,
    }
  const σ = spreadOfPosition_K[source]
  const keep = Math.exp(-dt_s / position_s)
  return { keep, deltaQ_K2: σ * σ * (1 - keep * keep) }
}

/** Nothing colder stands in a store of this kind, °C [common practice]. */
const coldest_C: Record<StorageUnitKind, number> = {
  'cold room': -60,
  refrigerator: -40,
  freezer: -100,
  bath: -60,
  'tank jacket': -60,
  dewar: -200,
  transport: -90,
}

/** A room is seldom warmer than its stated surroundings by more than this, K. */
const overAmbient_K = 8

/** No corner of a store is warmer than its measured air by more than this, K [common practice]. */
const overAir_K = 6

/**
 * How often, and how far, what surrounds an item jumps: a door, a hand, a defrost that no air probe
 * sees. With an air probe the air itself is known and only the item's own corner may jump.
 */
export function jumpOf(
  unit: PlannedUnit,
  t_ms: number,
  measured: boolean,
  onWall: boolean,
  dt_s: number,
  air_C: number | null,
): Jump {
  const given = valueAt(unit.given, t_ms)
  const every_s = measured ? 40 * 3600 : onWall ? 14_400 : 1800
  return {
    chance: Math.min(0.3, 1 - Math.exp(-Math.max(dt_s, 1) / every_s)),
    size_K: measured ? 2.5 : 9,
    warmest_C: Math.min(
      (given.ambient_C ?? 22) + overAmbient_K,
      air_C === null ? Number.POSITIVE_INFINITY : air_C + overAir_K,
    ),
    coldest_C: coldest_C[given.kind],
  }
}
