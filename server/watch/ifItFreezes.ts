import type { Judgement } from '../../config/schema/verdict.js'
import { coldestLiquid_C, warmest_C } from '../physics/constants.js'
import { type Interval, solidifying } from '../physics/freezingTime.js'
import { jump } from '../physics/jump.js'
import { airRise_K, neighbourRise_K } from '../physics/surroundings.js'
import { placeAt } from './evidence.js'
import type { View } from './judgement.js'
import { type Plan, valueAt } from './plan.js'

const writable = (i: Interval | null): [number, number, number] | null =>
  i === null ? null : [i[0], i[1], i[2]]

/**
 * What happens if ice nucleates now, for one container of the item, wall included; `airRise_all_K`
 * for all of them together. At or above the freezing point no ice forms and nothing is given off.
 */
export function ifItFreezes(plan: Plan, v: View): Judgement['ifItFreezes'] {
  const { matter, estimate, item, now_ms } = v
  const s = matter.substance
  const T_C = Math.max(coldestLiquid_C, Math.min(warmest_C, estimate.liquid_C ?? estimate.T_C))
  const now = jump(s, matter.wall_kJ_kgK, T_C)
  const air_C = v.heading.env_C
  const coupling = { UA_W_K: matter.UA_W_K, fill_kg: matter.fill_kg }
  const later = solidifying(s, matter.wall_kJ_kgK, now, air_C, coupling)
  const unit = valueAt(plan.units[placeAt(item, now_ms)]!.given, now_ms)
  const lasts_h = later.solid_h?.[1] ?? later.settle_h?.[1] ?? null
  const none = now.firstIce_kg_kg <= 0
  const rise = (count: number) =>
    none ? null : writable(airRise_K(unit, count, matter.UA_W_K, now.end_C, air_C, lasts_h))
  return {
    end_C: now.end_C,
    firstIce_kg_kg: now.firstIce_kg_kg,
    jump_K: now.jump_K,
    heatNow_kJ: now.heatNow_kJ_kg * matter.fill_kg,
    heatToSolid_kJ:
      later.heatToSolid_kJ_kg === null ? null : later.heatToSolid_kJ_kg * matter.fill_kg,
    solid_h: writable(later.solid_h),
    settlesAt_kg_kg: later.settlesAt_kg_kg,
    settle_h: writable(later.settle_h),
    airRise_K: rise(1),
    airRise_all_K: rise(item.item.count),
    neighbourRise_K: none ? null : writable(neighbourRise_K(now.end_C, air_C)),
  }
}
