import { coldestFrozen_C, coldestLiquid_C, warmest_C } from './constants.js'
import { osmolalityAt, osmolalitySlope } from './equilibrium.js'
import { fusionAt, fusionSlope } from './fusion.js'
import { within_C } from './range.js'
import { liquidWater_kg_kg, liquidWaterSlope } from './solution.js'
import type { Substance } from './substance.js'
import { cpOfLiquid, hOfIce, hOfLiquid, iceCp_kJ_kgK } from './water.js'

/**
 * The two branches of a product as functions of temperature. Enthalpies are per kg of product and
 * count from the product as a liquid at 0 °C; the container's wall is left to the caller.
 *
 *     liquid        h = w0 h_l(T) + (1 − w0) c_s T
 *     equilibrium   h = w0 h_l(T) + (1 − w0) c_s T − x(T) ΔH_f(T)        x = ice
 */

export { coldestFrozen_C } from './constants.js'

/** The coldest place of the equilibrium branch where ice still grows, °C. */
export function endOfFreezing_C(s: Substance): number {
  return s.stop?.T_C ?? coldestLiquid_C
}

/** Ice on the curve itself, between the freezing point and the end of freezing; no plateau. */
const iceOnCurve = (s: Substance, t: number): number =>
  s.water_kg_kg - liquidWater_kg_kg(s.pieces, osmolalityAt(t))

/** Most ice the product can hold: what the end of freezing leaves, or all at a eutectic. */
export function mostIce_kg_kg(s: Substance): number {
  if (s.freezingPoint_C <= coldestLiquid_C) return 0
  return s.stop?.kind === 'eutectic'
    ? s.water_kg_kg - s.bound_kg_kg
    : iceOnCurve(s, endOfFreezing_C(s))
}

/**
 * Ice that is in equilibrium at a temperature.
 *
 *     x = w0 − w_liq(π_eq(T))
 *
 * Below the stop, and below −40 °C, it stays as it was there; at a eutectic all of the free water
 * freezes, so that just below it x = w0 − bound.
 *
 * @param t_C  −200 … +60 °C
 * @returns    kg per kg of product, 0 … w0 − bound; it never falls on cooling
 * @throws     Refusal 'out-of-range'
 */
export function ice_kg_kg(s: Substance, t_C: number): number {
  return iceAt(s, within_C(t_C, coldestFrozen_C, warmest_C, 'the ice of a product'))
}

/** `ice_kg_kg` for callers that hold the range themselves. */
export function iceAt(s: Substance, t: number): number {
  if (t >= s.freezingPoint_C) return 0
  const end = endOfFreezing_C(s)
  if (t < end) return mostIce_kg_kg(s)
  return Math.max(0, iceOnCurve(s, t))
}

/**
 * Osmolality of the liquid: its own above the freezing point, that beside ice below.
 *
 * @param t_C  −200 … +60 °C; below the stop and below −40 °C it stays as it was there
 * @returns    osmol per kg of water
 * @throws     Refusal 'out-of-range'
 */
export function liquidOsmolality_osmol_kg(s: Substance, t_C: number): number {
  const t = within_C(t_C, coldestFrozen_C, warmest_C, 'the osmolality of a product')
  return t >= s.freezingPoint_C
    ? s.osmolality_osmol_kg
    : Math.max(s.osmolality_osmol_kg, osmolalityAt(Math.max(t, endOfFreezing_C(s))))
}

/**
 * Enthalpy of the product as a liquid, supercooled or not.
 *
 * @param t_C  −40 … +60 °C: below −40 °C there is no such liquid
 * @returns    kJ/kg
 * @throws     Refusal 'out-of-range'
 */
export function liquidEnthalpy_kJ_kg(s: Substance, t_C: number): number {
  return hLiquid(s, within_C(t_C, coldestLiquid_C, warmest_C, 'the product as a liquid'))
}

/** `liquidEnthalpy_kJ_kg` for callers that hold the range themselves. */
export function hLiquid(s: Substance, t: number): number {
  return s.water_kg_kg * hOfLiquid(t) + (1 - s.water_kg_kg) * s.otherCp_kJ_kgK * t
}

/**
 * Heat capacity of the product as a liquid.
 *
 * @param t_C  −40 … +60 °C
 * @returns    kJ/(kg K)
 * @throws     Refusal 'out-of-range'
 */
export function liquidCp(s: Substance, t_C: number): number {
  return cLiquid(s, within_C(t_C, coldestLiquid_C, warmest_C, 'the product as a liquid'))
}

/** `liquidCp` for callers that hold the range themselves. */
export function cLiquid(s: Substance, t: number): number {
  return s.water_kg_kg * cpOfLiquid(t) + (1 - s.water_kg_kg) * s.otherCp_kJ_kgK
}

/** Heat capacity of solid salt, kJ/(kg K), where it no longer bends water's [common practice]. */
const solidSaltCp_kJ_kgK = 0.85

/** Heat capacities below −40 °C: of what is not ice, as constants. */
const frozenRest = (s: Substance): number => {
  const left = s.water_kg_kg - mostIce_kg_kg(s)
  const other = s.otherCp_kJ_kgK >= 0 ? s.otherCp_kJ_kgK : solidSaltCp_kJ_kgK
  // A glass takes up about as much as ice; what has not stopped is still a thick liquid.
  const leftCp = s.stop === null ? cpOfLiquid(0) : iceCp_kJ_kgK(coldestLiquid_C)
  return left * leftCp + (1 - s.water_kg_kg) * other
}

/**
 * Enthalpy of the product in equilibrium with ice. Above the freezing point it is the liquid.
 *
 * @param t_C  −200 … +60 °C. Below −40 °C ice only cools: c_i for it, and constants for the rest
 *             [common practice; within 10 %]. On a plateau (pure water, a eutectic) it is the
 *             warm, less frozen end.
 * @returns    kJ/kg
 * @throws     Refusal 'out-of-range'
 */
export function equilibriumEnthalpy_kJ_kg(s: Substance, t_C: number): number {
  return hEquilibrium(s, within_C(t_C, coldestFrozen_C, warmest_C, 'the product beside ice'))
}

/** `equilibriumEnthalpy_kJ_kg` for callers that hold the range themselves. */
export function hEquilibrium(s: Substance, t: number): number {
  if (t >= s.freezingPoint_C && t >= coldestLiquid_C) return hLiquid(s, t)
  if (t >= coldestLiquid_C) return hLiquid(s, t) - iceAt(s, t) * fusionAt(t)
  const x = mostIce_kg_kg(s)
  return (
    hLiquid(s, coldestLiquid_C) -
    x * fusionAt(coldestLiquid_C) +
    x * (hOfIce(t) - hOfIce(coldestLiquid_C)) +
    frozenRest(s) * (t - coldestLiquid_C)
  )
}

/**
 * Apparent heat capacity of the product in equilibrium with ice, dh/dT with the ice that forms.
 *
 *     c = w0 c_l + (1 − w0) c_s − x ΔH_f′ − ΔH_f dx/dT
 *
 * @param t_C  −200 … +60 °C; at a freezing point it is the liquid's
 * @returns    kJ/(kg K)
 * @throws     Refusal 'out-of-range'
 */
export function apparentCp_kJ_kgK(s: Substance, t_C: number): number {
  return cEquilibrium(s, within_C(t_C, coldestFrozen_C, warmest_C, 'the product beside ice'))
}

/** `apparentCp_kJ_kgK` for callers that hold the range themselves. */
export function cEquilibrium(s: Substance, t: number): number {
  if (t >= s.freezingPoint_C && t >= coldestLiquid_C) return cLiquid(s, t)
  if (t < coldestLiquid_C) return mostIce_kg_kg(s) * iceCp_kJ_kgK(t) + frozenRest(s)
  const still = cLiquid(s, t) - iceAt(s, t) * fusionSlope(t)
  if (t < endOfFreezing_C(s)) return still
  return still + fusionAt(t) * growth(s, t)
}

/** −dx/dT, kg/(kg K), on the curve. */
const growth = (s: Substance, t: number): number =>
  -liquidWaterSlope(s.pieces, osmolalityAt(t)) * osmolalitySlope(t)
