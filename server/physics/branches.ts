import { coldestFrozen_C, coldestLiquid_C, warmest_C } from './constants.js'
import {
  cEquilibrium,
  cLiquid,
  endOfFreezing_C,
  hEquilibrium,
  hLiquid,
  iceAt,
  mostIce_kg_kg,
} from './curves.js'
import { fusionAt } from './fusion.js'
import type { Substance } from './substance.js'

/**
 * The two branches read the other way: temperature from enthalpy, the wall of the container in
 * both. h is kJ per kg of product, wall included: h = h_product(T) + C_x T.
 */

/** A state in equilibrium with ice (or without, above the freezing point). */
export type OnIce = { readonly T_C: number; readonly ice_kg_kg: number }

/** Steps of the safeguarded Newton method: it needs 6 to 10, and halving alone ends in 60. */
const mostSteps = 80

/** Root of a rising f between two temperatures that bracket it: Newton, halving where it strays. */
function rootBetween(
  cold_C: number,
  warm_C: number,
  f: (t: number) => number,
  slope: (t: number) => number,
): number {
  let low = cold_C
  let high = warm_C
  let t = (low + high) / 2
  for (let k = 0; k < mostSteps; k++) {
    const y = f(t)
    if (y === 0) return t
    if (y > 0) high = t
    else low = t
    const newton = t - y / slope(t)
    const next = newton > low && newton < high ? newton : (low + high) / 2
    if (Math.abs(next - t) < 1e-13 * (1 + Math.abs(t))) return next
    t = next
  }
  return t
}

/**
 * Temperature of the product as a liquid.
 *
 * @param wall_kJ_kgK  heat capacity of the wall that takes part, per kg of product; 0 or more
 * @param h_kJ_kg      wall included
 * @returns            °C. Beyond −40 and +60 °C, where the model ends, straight on with the heat
 *                     capacity there: whoever needs to know compares with `coldestLiquid_C`.
 */
export function liquidTemperature_C(s: Substance, wall_kJ_kgK: number, h_kJ_kg: number): number {
  for (const end of [coldestLiquid_C, warmest_C]) {
    const beyond = h_kJ_kg - hLiquid(s, end) - wall_kJ_kgK * end
    if (end < 0 ? beyond <= 0 : beyond >= 0) return end + beyond / (cLiquid(s, end) + wall_kJ_kgK)
  }
  return rootBetween(
    coldestLiquid_C,
    warmest_C,
    (t) => hLiquid(s, t) + wall_kJ_kgK * t - h_kJ_kg,
    (t) => cLiquid(s, t) + wall_kJ_kgK,
  )
}

/** Ice that forms at the freezing point at one temperature: pure water, or water and solids. */
export function plateauAtFreezing_kg_kg(s: Substance): number {
  const only = s.pieces[0]
  return s.freezingPoint_C > coldestLiquid_C && only !== undefined && only.N === 0
    ? s.water_kg_kg - only.B
    : 0
}

/** Ice that forms at the stop at one temperature: the eutectic. */
export function plateauAtStop_kg_kg(s: Substance): number {
  return s.stop?.kind === 'eutectic' ? mostIce_kg_kg(s) - iceAt(s, s.stop.T_C) : 0
}

/** Temperature and ice where all of a plateau's ice would form between two enthalpies. */
const onPlateau = (
  T_C: number,
  before_kg_kg: number,
  size_kg_kg: number,
  above_kJ_kg: number,
): OnIce => ({
  T_C,
  ice_kg_kg: before_kg_kg + Math.min(size_kg_kg, above_kJ_kg / fusionAt(T_C)),
})

/**
 * The product in equilibrium with ice, from its enthalpy.
 *
 * @param wall_kJ_kgK  heat capacity of the wall that takes part, per kg of product; 0 or more
 * @param h_kJ_kg      wall included
 * @returns            temperature and ice; above the freezing point the liquid and no ice. Below
 *                     −200 °C straight on.
 */
export function equilibriumFrom(s: Substance, wall_kJ_kgK: number, h_kJ_kg: number): OnIce {
  const hAt = (t: number) => hEquilibrium(s, t) + wall_kJ_kgK * t
  const slope = (t: number) => cEquilibrium(s, t) + wall_kJ_kgK
  const between = (cold: number, warm: number): OnIce => {
    const T_C = rootBetween(cold, warm, (t) => hAt(t) - h_kJ_kg, slope)
    return { T_C, ice_kg_kg: iceAt(s, T_C) }
  }
  const Tf = Math.max(s.freezingPoint_C, coldestLiquid_C)
  const hf = hLiquid(s, Tf) + wall_kJ_kgK * Tf
  if (h_kJ_kg >= hf) return { T_C: liquidTemperature_C(s, wall_kJ_kgK, h_kJ_kg), ice_kg_kg: 0 }

  const first = plateauAtFreezing_kg_kg(s)
  if (first > 0 && h_kJ_kg >= hf - first * fusionAt(Tf))
    return onPlateau(Tf, 0, first, hf - h_kJ_kg)

  const end = Math.min(endOfFreezing_C(s), Tf)
  const hEnd = hAt(end)
  if (h_kJ_kg >= hEnd) return between(end, Tf)

  const last = plateauAtStop_kg_kg(s)
  if (last > 0 && h_kJ_kg >= hEnd - last * fusionAt(end))
    return onPlateau(end, iceAt(s, end), last, hEnd - h_kJ_kg)

  const x = mostIce_kg_kg(s)
  const hCold = hAt(coldestFrozen_C)
  if (h_kJ_kg <= hCold)
    return { T_C: coldestFrozen_C + (h_kJ_kg - hCold) / slope(coldestFrozen_C), ice_kg_kg: x }
  const { T_C } = between(coldestFrozen_C, end)
  return { T_C, ice_kg_kg: x }
}

/** Temperature alone of `equilibriumFrom`, °C. */
export function equilibriumTemperatureFrom_C(
  s: Substance,
  wall_kJ_kgK: number,
  h_kJ_kg: number,
): number {
  return equilibriumFrom(s, wall_kJ_kgK, h_kJ_kg).T_C
}

/**
 * Where on the equilibrium branch the product holds a given mass of ice.
 *
 * @param ice_kg_kg  0 … the most the product can hold
 * @returns          temperature, and enthalpy with the wall
 */
export function whereIce(
  s: Substance,
  wall_kJ_kgK: number,
  ice_kg_kg: number,
): { readonly T_C: number; readonly h_kJ_kg: number } {
  const Tf = Math.max(s.freezingPoint_C, coldestLiquid_C)
  const at = (T_C: number) => ({
    T_C,
    h_kJ_kg: hLiquid(s, T_C) - ice_kg_kg * fusionAt(T_C) + wall_kJ_kgK * T_C,
  })
  if (ice_kg_kg <= plateauAtFreezing_kg_kg(s)) return at(Tf)
  const end = Math.min(endOfFreezing_C(s), Tf)
  if (ice_kg_kg >= iceAt(s, end)) return at(end)
  let low = end
  let high = Tf
  for (let k = 0; k < 100 && high - low > 1e-14 * (1 - low); k++) {
    const middle = (low + high) / 2
    if (iceAt(s, middle) > ice_kg_kg) low = middle
    else high = middle
  }
  return at((low + high) / 2)
}
