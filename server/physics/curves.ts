import { Refusal } from '../../config/schema/refusal.js'
import { equilibriumOsmolality_osmol_kg } from './equilibrium.js'
import { latentHeat_kJ_kg } from './fusion.js'
import { coldestEquilibrium_C, liquidWater_kg_kg, type Substance } from './substance.js'
import { coldestLiquid_C, ice_cp_kJ_kgK, liquid_h_kJ_kg, warmest_C } from './water.js'

/**
 * The two branches of a product, per kg of product, wall left out. Zero of enthalpy: the product
 * liquid at 0 °C.
 *
 *     liquid       h_L(T) = w₀ h_l(T) + (1 − w₀) c_s T
 *     equilibrium  h_E(T) = h_L(T) − x(T) ΔH_f(T)          x = w₀ − w_liq(π_eq(T))
 *
 * Below the stop (eutectic or glass) x keeps its value there. At a eutectic what is left freezes
 * at the stop temperature itself (rulings.md 9).
 */

/** Coldest temperature of the frozen branch: the bottom of the range of ice. */
export const coldestFrozen_C = -100

/** Temperature below which nothing more freezes out gradually, °C. */
export const stop_C = (s: Substance): number =>
  Math.max(coldestEquilibrium_C, s.stop?.T_C ?? coldestEquilibrium_C)

/** Ice in equilibrium, kg per kg of product. @param t_C −100 … 60 °C */
export function ice_kg_kg(s: Substance, t_C: number): number {
  if (t_C >= s.freezingPoint_C) return 0
  const stop = stop_C(s)
  if (t_C < stop && s.stop?.kind === 'eutectic') return s.water_kg_kg - s.bound_kg_kg
  const π = equilibriumOsmolality_osmol_kg(Math.max(t_C, stop))
  return π <= 0
    ? s.water_kg_kg - s.bound_kg_kg
    : Math.max(0, s.water_kg_kg - liquidWater_kg_kg(s, π))
}

/** Osmolality of the liquid that is left: the product's own above its freezing point. */
export function liquidOsmolality_osmol_kg(s: Substance, t_C: number): number {
  return t_C >= s.freezingPoint_C
    ? s.osmolality_osmol_kg
    : equilibriumOsmolality_osmol_kg(Math.max(t_C, stop_C(s)))
}

/** Enthalpy of the product all liquid, kJ/kg. @param t_C −40 … 60 °C. @throws Refusal outside */
export function liquidEnthalpy_kJ_kg(s: Substance, t_C: number): number {
  return s.water_kg_kg * liquid_h_kJ_kg(t_C) + (1 - s.water_kg_kg) * s.other_cp_kJ_kgK * t_C
}

/** Heat capacity of what is not water once all is solid; a salt's negative one is a liquid's affair. */
const solid_cp_kJ_kgK = (s: Substance): number => Math.max(1, s.other_cp_kJ_kgK)

/**
 * Enthalpy of the product in equilibrium with its ice, kJ/kg.
 *
 * Below −40 °C, where no liquid is known, it goes on with the heat capacity of ice for all water.
 *
 * @param t_C  −100 … 60 °C
 * @throws Refusal outside
 */
export function equilibriumEnthalpy_kJ_kg(s: Substance, t_C: number): number {
  if (!(t_C >= coldestFrozen_C && t_C <= warmest_C))
    throw new Refusal(
      'out-of-range',
      't_C',
      t_C,
      `the curves hold from ${coldestFrozen_C} to ${warmest_C} °C`,
      'give a temperature within it',
    )
  if (t_C >= s.freezingPoint_C) return liquidEnthalpy_kJ_kg(s, t_C)
  const at_C = Math.max(t_C, coldestLiquid_C)
  const h = liquidEnthalpy_kJ_kg(s, at_C) - ice_kg_kg(s, at_C) * latentHeat_kJ_kg(at_C)
  if (t_C >= coldestLiquid_C) return h
  const below_K = t_C - coldestLiquid_C
  const mean_cp = ice_cp_kJ_kgK((t_C + coldestLiquid_C) / 2)
  return h + below_K * (s.water_kg_kg * mean_cp + (1 - s.water_kg_kg) * solid_cp_kJ_kgK(s))
}

/**
 * Apparent heat capacity along the equilibrium branch, dh_E/dT, kJ/(kg K), by central difference;
 * one-sided at the freezing point and at the stop, where it jumps.
 */
export function equilibrium_cp_kJ_kgK(s: Substance, t_C: number): number {
  const Δ = 1e-4
  const edges = [s.freezingPoint_C, stop_C(s)]
  const low = edges.some((e) => t_C >= e && t_C - Δ < e) ? t_C : t_C - Δ
  const high = edges.some((e) => t_C < e && t_C + Δ >= e) ? t_C : t_C + Δ
  return (equilibriumEnthalpy_kJ_kg(s, high) - equilibriumEnthalpy_kJ_kg(s, low)) / (high - low)
}

/** A monotone function solved for its argument: bisection and secant in turn (Illinois). */
export function solveRising(
  f: (x: number) => number,
  target: number,
  low: number,
  high: number,
): number {
  let a = low
  let b = high
  let fa = f(a) - target
  let fb = f(b) - target
  if (fa >= 0) return a
  if (fb <= 0) return b
  let side = 0
  for (let i = 0; i < 200 && b - a > 1e-12; i++) {
    // Plain bisection every third turn: the curve has corners where the secant crawls.
    const c = i % 3 === 2 ? (a + b) / 2 : (fa * b - fb * a) / (fa - fb)
    const fc = f(c) - target
    if (fc === 0) return c
    if (fc < 0) {
      a = c
      fa = fc
      if (side === -1) fb /= 2
      side = -1
    } else {
      b = c
      fb = fc
      if (side === 1) fa /= 2
      side = 1
    }
  }
  return (a + b) / 2
}

/** Temperature on the liquid branch at an enthalpy, °C; wall_kJ_kgK counts with the product. */
export const liquidTemperature_C = (s: Substance, h_kJ_kg: number, wall_kJ_kgK = 0): number =>
  solveRising(
    (t) => liquidEnthalpy_kJ_kg(s, t) + wall_kJ_kgK * t,
    h_kJ_kg,
    coldestLiquid_C,
    warmest_C,
  )

/** Temperature on the equilibrium branch at an enthalpy, °C; wall_kJ_kgK counts with the product. */
export const equilibriumTemperatureAt_C = (
  s: Substance,
  h_kJ_kg: number,
  wall_kJ_kgK = 0,
): number =>
  solveRising(
    (t) => equilibriumEnthalpy_kJ_kg(s, t) + wall_kJ_kgK * t,
    h_kJ_kg,
    coldestFrozen_C,
    warmest_C,
  )
