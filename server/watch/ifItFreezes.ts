import type { Judgement } from '../../config/schema/verdict.js'
import { jump } from '../physics/jump.js'
import type { View } from './judgement.js'
import type { Plan } from './plan.js'

/** What happens if ice nucleates now, for one container of the item, wall included. */
export function ifItFreezes(_plan: Plan, v: View): Judgement['ifItFreezes'] {
  const { matter, estimate } = v
  const T_C = estimate.liquid_C ?? estimate.T_C
  const j = jump(matter.substance, matter.wall_kJ_kgK, Math.max(-40, Math.min(60, T_C)))
  return {
    end_C: j.end_C,
    firstIce_kg_kg: j.firstIce_kg_kg,
    jump_K: j.jump_K,
    heatNow_kJ: j.heatNow_kJ_kg * matter.fill_kg,
    heatToSolid_kJ: null,
    solid_h: null,
    settlesAt_kg_kg: null,
    settle_h: null,
    airRise_K: null,
    airRise_all_K: null,
    neighbourRise_K: null,
  }
}
