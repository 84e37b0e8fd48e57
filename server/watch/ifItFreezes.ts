import type { Interval, Judgement } from '../../config/schema/verdict.js'
import { coldestLiquid_C, warmest_C } from '../physics/constants.js'
import { solidifying } from '../physics/freezingTime.js'
import { jump } from '../physics/jump.js'
import { airRise_K, neighbourRise_K } from '../physics/surroundings.js'
import { placeAt } from './evidence.js'
import type { View } from './judgement.js'
import { type Plan, valueAt } from './plan.js'

const open = (interval: readonly [number, number, number] | null): Interval | null =>
  interval === null ? null : [...interval]

/**
 * What happens if ice nucleates now, for one container of the item, wall included, in the air that
 * it heads for (rulings.md 6, 8).
 */
export function ifItFreezes(plan: Plan, v: View): Judgement['ifItFreezes'] {
  const { matter, estimate, heading } = v
  const { substance, wall_kJ_kgK, fill_kg, UA_W_K } = matter
  const liquid_C = estimate.liquid_C ?? estimate.T_C
  const j = jump(substance, wall_kJ_kgK, Math.max(coldestLiquid_C, Math.min(warmest_C, liquid_C)))
  const air_C = Number.isFinite(heading.env_C) ? heading.env_C : null
  const above = j.firstIce_kg_kg === 0
  const after = above ? null : solidifying(substance, wall_kJ_kgK, j, air_C, { UA_W_K, fill_kg })
  const unit = valueAt(plan.units[placeAt(v.item, v.now_ms)]!.given, v.now_ms)
  const lasts_h = after?.solid_h?.[1] ?? after?.settle_h?.[1] ?? null
  const rise = (count: number) =>
    above || air_C === null ? null : open(airRise_K(unit, count, UA_W_K, j.end_C, air_C, lasts_h))
  const toSolid = after?.heatToSolid_kJ_kg ?? null
  return {
    end_C: j.end_C,
    firstIce_kg_kg: j.firstIce_kg_kg,
    jump_K: j.jump_K,
    heatNow_kJ: j.heatNow_kJ_kg * fill_kg,
    heatToSolid_kJ: toSolid === null ? null : toSolid * fill_kg,
    solid_h: open(after?.solid_h ?? null),
    settlesAt_kg_kg: after?.settlesAt_kg_kg ?? null,
    settle_h: open(after?.settle_h ?? null),
    airRise_K: rise(1),
    airRise_all_K: rise(v.item.item.count),
    neighbourRise_K: above || air_C === null ? null : open(neighbourRise_K(j.end_C, air_C)),
  }
}
