import { equilibriumTemperatureAt_C, ice_kg_kg, liquidEnthalpy_kJ_kg } from './curves.js'
import { latentHeat_kJ_kg } from './fusion.js'
import type { Substance } from './substance.js'

export type Jump = {
  readonly end_C: number
  readonly firstIce_kg_kg: number
  readonly jump_K: number
  /** Released by the first ice and kept by the item, kJ per kg of product. */
  readonly heatNow_kJ_kg: number
}

/**
 * Recalescence: the equilibrium branch read at the enthalpy of the liquid, wall included.
 *
 *     h_L(T_n) + C_x T_n = h_E(T_e) + C_x T_e
 *
 * @param wall_kJ_kgK  C_x, heat capacity of the wall per kg of product
 * @param from_C       T_n, −40 … 60 °C
 * @throws Refusal outside
 */
export function jump(s: Substance, wall_kJ_kgK: number, from_C: number): Jump {
  if (from_C >= s.freezingPoint_C)
    return { end_C: from_C, firstIce_kg_kg: 0, jump_K: 0, heatNow_kJ_kg: 0 }
  const h = liquidEnthalpy_kJ_kg(s, from_C) + wall_kJ_kgK * from_C
  const end_C = equilibriumTemperatureAt_C(s, h, wall_kJ_kgK)
  const firstIce_kg_kg = ice_kg_kg(s, end_C)
  return {
    end_C,
    firstIce_kg_kg,
    jump_K: end_C - from_C,
    heatNow_kJ_kg: firstIce_kg_kg * latentHeat_kJ_kg(Math.max(-40, end_C)),
  }
}
