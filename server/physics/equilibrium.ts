import { Refusal } from '../../config/schema/refusal.js'
import { pureMelting_C, waterMolarMass_kg_mol } from './constants.js'

/**
 * Osmolality of the liquid that is in equilibrium with ice at a temperature.
 *
 *     π_eq = 0.536904935 θ + 4.04979071e-4 θ² − 1.10009837e-5 θ³      θ = pureMelting_C − t
 *
 * @param t_C  −40 … +60 °C. At and above the melting point there is no such ice: 0.
 * @returns    osmol per kg water, within 0.20 % of the IAPWS formulations
 * @throws     Refusal 'out-of-range' outside; below −40 °C G12-15 stops being physical
 * @source     cubic fitted here to G12-15 (Holten et al. 2014, J. Phys. Chem. Ref. Data 43,
 *             043101) and R10-06(2009)
 */
export function equilibriumOsmolality_osmol_kg(t_C: number): number {
  if (!(t_C >= -40 && t_C <= 60))
    throw new Refusal(
      'out-of-range',
      't_C',
      t_C,
      'the fit holds from −40 °C up',
      'clamp and report it',
    )
  const θ = Math.max(0, pureMelting_C - t_C)
  return θ * (0.536904935 + θ * (4.04979071e-4 - θ * 1.10009837e-5))
}

/** dπ_eq/dt, osmol/(kg K); 0 where there is no ice. Same range and source as π_eq. */
export function equilibriumOsmolalitySlope(t_C: number): number {
  const θ = pureMelting_C - t_C
  return θ <= 0 ? 0 : -(0.536904935 + θ * (2 * 4.04979071e-4 - θ * 3 * 1.10009837e-5))
}

/**
 * Temperature at which ice is in equilibrium with a liquid: π_eq solved for t by Newton's method.
 *
 * @param osmolality_osmol_kg  0 … about 21.1 (that of −40 °C)
 * @returns  °C
 * @throws   Refusal 'out-of-range'
 * @source   the inverse of `equilibriumOsmolality_osmol_kg`
 */
export function equilibriumTemperature_C(osmolality_osmol_kg: number): number {
  const most = equilibriumOsmolality_osmol_kg(-40)
  if (!(osmolality_osmol_kg >= 0 && osmolality_osmol_kg <= most))
    throw new Refusal(
      'out-of-range',
      'osmolality_osmol_kg',
      osmolality_osmol_kg,
      `it lies between 0 and ${most.toFixed(2)} (that of ice at −40 °C)`,
      'give osmol per kg of water',
    )
  let t = pureMelting_C - osmolality_osmol_kg * 1.8626
  for (let i = 0; i < 20; i++) {
    const Δ =
      (equilibriumOsmolality_osmol_kg(Math.max(-40, t)) - osmolality_osmol_kg) /
      equilibriumOsmolalitySlope(Math.max(-40, Math.min(t, 0)))
    t = Math.max(-40, t - Δ)
    if (Math.abs(Δ) < 1e-12) break
  }
  return t
}

/**
 * Activity of water in a liquid of an osmolality: a_w = exp(−π M_w), the definition of osmolality.
 *
 * @param osmolality_osmol_kg  from 0
 */
export function waterActivity(osmolality_osmol_kg: number): number {
  return Math.exp(-osmolality_osmol_kg * waterMolarMass_kg_mol)
}
