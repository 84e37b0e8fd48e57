import { Refusal } from '../../config/schema/refusal.js'
import { equilibriumFrom } from './branches.js'
import { coldestLiquid_C, pureMelting_C, warmest_C } from './constants.js'
import { hLiquid } from './curves.js'
import { fusionAt } from './fusion.js'
import type { Substance } from './substance.js'

/** What ice does to a liquid at once, before any heat has left. */
export type Jump = {
  readonly from_C: number
  readonly end_C: number
  readonly jump_K: number
  /** Ice at the end, kg per kg of product. */
  readonly firstIce_kg_kg: number
  /** The same as a share of all the water. */
  readonly firstIce_ofWater: number
  /** Heat of fusion at the end, kJ per kg of ice. */
  readonly latentHeatAtEnd_kJ_kg: number
  /** What the first ice gives off and the product and its wall keep, kJ per kg of product. */
  readonly heatNow_kJ_kg: number
  /** Enthalpy before and after, wall included, kJ per kg of product. */
  readonly h_kJ_kg: number
}

/**
 * Recalescence: ice forms in a supercooled liquid and warms it, at constant enthalpy.
 *
 *     w0 [h_l(T_e) − h_l(T_n)] + [(1 − w0) c_s + C_x] (T_e − T_n) = x(T_e) ΔH_f(T_e)
 *
 * So the temperature is read off the other branch at the same enthalpy; at or above the freezing
 * point nothing happens.
 *
 * @param wall_kJ_kgK  heat capacity of the container's wall per kg of product, kJ/(kg K), ≥ 0
 * @param from_C       temperature of the liquid before, −40 … +60 °C
 * @returns            T_e ± 0.05 K and ice ± 5 % for a real container: none is adiabatic
 * @throws             Refusal 'out-of-range'
 */
export function jump(s: Substance, wall_kJ_kgK: number, from_C: number): Jump {
  if (!(from_C >= coldestLiquid_C && from_C <= warmest_C))
    throw new Refusal(
      'out-of-range',
      'from_C',
      from_C,
      `a liquid is known from ${coldestLiquid_C} to ${warmest_C} °C; colder, none stays liquid`,
      `give a temperature from ${coldestLiquid_C} to ${warmest_C} °C`,
    )
  const h_kJ_kg = hLiquid(s, from_C) + wall_kJ_kgK * from_C
  const { T_C, ice_kg_kg } =
    from_C >= s.freezingPoint_C
      ? { T_C: from_C, ice_kg_kg: 0 }
      : equilibriumFrom(s, wall_kJ_kgK, h_kJ_kg)
  // Above the melting point there is no ice to have a heat of fusion: that of the melting point.
  const latentHeatAtEnd_kJ_kg = fusionAt(Math.min(T_C, pureMelting_C))
  return {
    from_C,
    end_C: T_C,
    jump_K: T_C - from_C,
    firstIce_kg_kg: ice_kg_kg,
    firstIce_ofWater: ice_kg_kg / s.water_kg_kg,
    latentHeatAtEnd_kJ_kg,
    heatNow_kJ_kg: ice_kg_kg * latentHeatAtEnd_kJ_kg,
    h_kJ_kg,
  }
}
