import { coldestLiquid_C, pureMelting_C, warmest_C, waterMolarMass_kg_mol } from './constants.js'
import { within_C } from './range.js'

/**
 * Osmolality of the liquid that is in equilibrium with ice at a temperature.
 *
 *     π_eq = 0.536904935 θ + 4.04979071e-4 θ² − 1.10009837e-5 θ³     θ = pureMelting_C − t_C
 *
 * @param t_C  −40 … +60 °C. At and above the melting point there is no such ice: 0.
 * @returns    osmol per kg water, within 0.20 % of the IAPWS formulations
 * @throws     Refusal 'out-of-range' outside; below −40 °C G12-15 stops being physical
 * @source     cubic fitted to G12-15 (Holten et al. 2014, J. Phys. Chem. Ref. Data 43, 043101)
 *             and R10-06(2009)
 */
export function equilibriumOsmolality_osmol_kg(t_C: number): number {
  return osmolalityAt(within_C(t_C, coldestLiquid_C, warmest_C, 'liquid beside ice'))
}

/** Depth of the fit below the melting point, K. */
const θend = pureMelting_C - coldestLiquid_C
const cubic = (θ: number): number => θ * (0.536904935 + θ * (4.04979071e-4 - θ * 1.10009837e-5))
const slope = (θ: number): number => 0.536904935 + θ * (8.09958142e-4 - θ * 3.30029511e-5)
const πend = cubic(θend)
const slopeEnd = slope(θend)

/**
 * `equilibriumOsmolality_osmol_kg` for callers that hold the range themselves. Below −40 °C it goes
 * on as a straight line (1.4 % above Murphy and Koop 2005 at −50 °C, 5 % at −60 °C), so that the
 * freezing point of a very strong solution is a number; whoever uses it flags it extrapolated.
 */
export function osmolalityAt(t: number): number {
  const θ = pureMelting_C - t
  if (θ <= 0) return 0
  return θ <= θend ? cubic(θ) : πend + slopeEnd * (θ - θend)
}

/** −dπ_eq/dt, osmol/(kg K): how much more concentrated the liquid is for a kelvin colder. */
export function osmolalitySlope(t: number): number {
  const θ = pureMelting_C - t
  return θ <= θend ? slope(Math.max(0, θ)) : slopeEnd
}

/**
 * Temperature at which a liquid of an osmolality is in equilibrium with ice: its freezing point.
 *
 * @param π_osmol_kg  0 or more; above 21.4 (−40 °C) extrapolated, see `osmolalityAt`
 * @returns           °C, the inverse of π_eq to 1e-12 K
 */
export function equilibriumTemperature_C(π_osmol_kg: number): number {
  const π = π_osmol_kg
  if (!(π > 0)) return pureMelting_C
  if (π >= πend) return pureMelting_C - θend - (π - πend) / slopeEnd
  // The cubic bends so little that Newton from the straight line ends in four steps.
  let θ = π / 0.536904935
  for (let k = 0; k < 12; k++) {
    const step = (cubic(θ) - π) / slope(θ)
    θ -= step
    if (Math.abs(step) < 1e-13 * (1 + θ)) break
  }
  return pureMelting_C - θ
}

/**
 * Water activity of a liquid of an osmolality.
 *
 *     a_w = exp(−π M_w)
 *
 * @param π_osmol_kg  0 or more
 * @returns           1 for pure water
 */
export function waterActivity(π_osmol_kg: number): number {
  return Math.exp(-π_osmol_kg * waterMolarMass_kg_mol)
}
