import { Refusal } from '../../config/schema/refusal.js'
import { pureMelting_C, R_J_molK, zeroCelsius_K } from './constants.js'
import { equilibriumOsmolality_osmol_kg } from './equilibrium.js'

/**
 * Heat released when water freezes at a temperature: h_liquid − h_ice there.
 *
 *     ΔH_f = 339.389191 + 1.99588215 t − 3.51865751e-3 t² − 3.02774570 / (t/100 + 0.505579886)
 *
 * @param t_C  −40 … 0.01 °C
 * @returns    kJ per kg of ice, within 0.010 %
 * @throws     Refusal 'out-of-range'
 * @source     fit made here to IAPWS G12-15 and R10-06(2009)
 */
export function latentHeat_kJ_kg(t_C: number): number {
  if (!(t_C >= -40 && t_C <= 0.01))
    throw new Refusal(
      'out-of-range',
      't_C',
      t_C,
      'the latent heat is known from −40 to 0 °C',
      'clamp and report it',
    )
  return (
    339.389191 + t_C * (1.99588215 - t_C * 3.51865751e-3) - 3.0277457 / (t_C / 100 + 0.505579886)
  )
}

/**
 * Gibbs energy of the first ice from a liquid: how hard it is driven to freeze.
 *
 *     ΔG = −R T [π_eq(T) − π₀]
 *
 * @param t_C                  −40 … 60 °C
 * @param osmolality_osmol_kg  π₀ of the liquid; 0 for water
 * @returns  J per kg of water; negative when supercooled, positive above the freezing point
 * @throws   Refusal 'out-of-range'
 * @source   definition of osmolality, π = −ln a_w / M_w, with the chemical potential of water
 */
export function drivingForce_J_kg(t_C: number, osmolality_osmol_kg: number): number {
  const T = t_C + zeroCelsius_K
  return -R_J_molK * T * (equilibriumOsmolality_osmol_kg(t_C) - osmolality_osmol_kg)
}

/** The range of `latentHeat_kJ_kg`, which the curves clamp to. */
export const latentRange_C = [-40, pureMelting_C] as const
