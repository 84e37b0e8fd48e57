import {
  coldestLiquid_C,
  pureFusion_kJ_kg,
  pureMelting_C,
  R_J_molK,
  warmest_C,
  zeroCelsius_K,
} from './constants.js'
import { osmolalityAt } from './equilibrium.js'
import { within_C } from './range.js'
import { hOfIce, hOfLiquid, iceEntropy_kJ_kgK, liquidWaterEntropy_kJ_kgK } from './water.js'

const pole = 0.505579886

/**
 * Heat of fusion of supercooled water: enthalpy of the liquid above that of ice at one temperature.
 *
 *     ΔH_f = 339.389191 + 1.99588215 t − 3.51865751e-3 t² − 3.02774570/(t/100 + 0.505579886)
 *
 * It falls by a third to −40 °C, because liquid water has twice the heat capacity of ice; the
 * shortcut 333.4 + 2.1 t is 8 % off at −38 °C.
 *
 * @param t_C  −40 … +0.01 °C
 * @returns    kJ per kg of ice, within 0.010 %
 * @throws     Refusal 'out-of-range'
 * @source     fitted to IAPWS G12-15 and R10-06(2009)
 */
export function latentHeat_kJ_kg(t_C: number): number {
  return fusionAt(within_C(t_C, coldestLiquid_C, 0.01, 'the heat of fusion'))
}

/** `latentHeat_kJ_kg` for callers that hold the range themselves. */
export function fusionAt(t: number): number {
  return 339.389191 + t * (1.99588215 - t * 3.51865751e-3) - 3.0277457 / (t / 100 + pole)
}

/** dΔH_f/dt, kJ/(kg K): the heat capacity of liquid water less that of ice. */
export function fusionSlope(t: number): number {
  const u = t / 100 + pole
  return 1.99588215 - t * 7.03731502e-3 + 3.0277457e-2 / (u * u)
}

/** The path from supercooled water to ice at one temperature, per kg. */
export type ThreeStepPath = {
  /** Heating the liquid to the melting point, freezing it there, cooling the ice; kJ/kg. */
  readonly heat_kJ_kg: number
  readonly freeze_kJ_kg: number
  readonly cool_kJ_kg: number
  readonly dH_kJ_kg: number
  readonly dS_kJ_kgK: number
  readonly dG_kJ_kg: number
  /** Entropy made in the universe; more than 0 wherever freezing goes by itself. */
  readonly entropyProduction_kJ_kgK: number
}

/**
 * Freezing of pure water at a temperature below its melting point, along a reversible path.
 *
 *     (1) liquid t → t_m: ∫c_l dT    (2) freezes at t_m: −L, −L/T_m    (3) ice t_m → t: −∫c_i dT
 *     ΔH = Σ ΔH_k    ΔS = Σ ΔS_k    ΔG = ΔH − TΔS    ΔS_universe = ΔS − ΔH/T = −ΔG/T
 *
 * H and S are functions of state, so the path may be chosen; the surroundings, at T, gain −ΔH/T.
 *
 * @param t_C  −40 °C … the melting point
 * @throws     Refusal 'out-of-range'
 * @source     IAPWS G12-15 and R10-06(2009) through the correlations of `water.ts`
 */
export function threeStepPath(t_C: number): ThreeStepPath {
  const t = within_C(t_C, coldestLiquid_C, pureMelting_C, 'freezing of pure water')
  const T = t + zeroCelsius_K
  const heat = hOfLiquid(pureMelting_C) - hOfLiquid(t)
  const cool = hOfIce(t) - hOfIce(pureMelting_C)
  const dH = heat - pureFusion_kJ_kg + cool
  const dS =
    liquidWaterEntropy_kJ_kgK(pureMelting_C) -
    liquidWaterEntropy_kJ_kgK(t) -
    pureFusion_kJ_kg / (pureMelting_C + zeroCelsius_K) +
    iceEntropy_kJ_kgK(t) -
    iceEntropy_kJ_kgK(pureMelting_C)
  const dG = dH - T * dS
  return {
    heat_kJ_kg: heat,
    freeze_kJ_kg: -pureFusion_kJ_kg,
    cool_kJ_kg: cool,
    dH_kJ_kg: dH,
    dS_kJ_kgK: dS,
    dG_kJ_kg: dG,
    entropyProduction_kJ_kgK: -dG / T,
  }
}

/**
 * Gibbs energy of the first ice from a liquid of an osmolality, per kg of water.
 *
 *     ΔG = −R T (π_eq(T) − π₀)
 *
 * The same as the three-step path: π_eq is −ln a_w,ice / M_w, and −RT ln a_w,ice is g_l − g_i.
 *
 * @param t_C         −40 … +60 °C
 * @param π_osmol_kg  osmolality of the liquid while it holds no ice
 * @returns           J per kg of water; negative when supercooled, 0 at the freezing point
 * @throws            Refusal 'out-of-range'
 */
export function drivingForce_J_kg(t_C: number, π_osmol_kg: number): number {
  within_C(t_C, coldestLiquid_C, warmest_C, 'liquid beside ice')
  return -R_J_molK * (t_C + zeroCelsius_K) * (osmolalityAt(t_C) - π_osmol_kg)
}

/**
 * Entropy made in the universe by the first ice, per kg of water: −ΔG/T.
 *
 * @param t_C         −40 … +60 °C
 * @param π_osmol_kg  osmolality of the liquid while it holds no ice
 * @returns           J/(kg K); more than 0 exactly when supercooled
 * @throws            Refusal 'out-of-range'
 */
export function entropyProduction_J_kgK(t_C: number, π_osmol_kg: number): number {
  return -drivingForce_J_kg(t_C, π_osmol_kg) / (t_C + zeroCelsius_K)
}
