import {
  coldestFrozen_C,
  equilibriumEnthalpy_kJ_kg,
  ice_kg_kg,
  liquidEnthalpy_kJ_kg,
} from '../server/physics/curves.js'
import type { Substance } from '../server/physics/substance.js'

/** Spacing of the tables: straight lines between are within 0.002 K of the curves. */
const spacing_K = 0.02
const top_C = 45
const bottomLiquid_C = -40

/** The two branches of a product as tables: enthalpy per kg at evenly spaced temperatures. */
export type Branches = {
  readonly substance: Substance
  readonly liquid: Float64Array
  readonly ice: Float64Array
}

const table = (from_C: number, h: (t_C: number) => number): Float64Array =>
  Float64Array.from({ length: Math.round((top_C - from_C) / spacing_K) + 1 }, (_, i) =>
    h(from_C + i * spacing_K),
  )

export const branchesOf = (substance: Substance): Branches => ({
  substance,
  liquid: table(bottomLiquid_C, (t) => liquidEnthalpy_kJ_kg(substance, t)),
  ice: table(coldestFrozen_C, (t) => equilibriumEnthalpy_kJ_kg(substance, t)),
})

const inverse = (h: Float64Array, from_C: number, value: number): number => {
  let low = 0
  let high = h.length - 1
  while (high - low > 1) {
    const middle = (low + high) >> 1
    if ((h[middle] ?? 0) <= value) low = middle
    else high = middle
  }
  const a = h[low] ?? 0
  const b = h[high] ?? 0
  return from_C + (low + (b > a ? (value - a) / (b - a) : 0)) * spacing_K
}

/** Temperature of a node at its enthalpy, on the branch it is on, °C. */
export const temperature_C = (b: Branches, turned: boolean, h_kJ_kg: number): number =>
  turned ? inverse(b.ice, coldestFrozen_C, h_kJ_kg) : inverse(b.liquid, bottomLiquid_C, h_kJ_kg)

/** Enthalpy of a node at a temperature, kJ/kg. */
export const enthalpy_kJ_kg = (b: Branches, turned: boolean, t_C: number): number =>
  turned ? equilibriumEnthalpy_kJ_kg(b.substance, t_C) : liquidEnthalpy_kJ_kg(b.substance, t_C)

/** Ice of a node, kg per kg of product: none on the liquid branch. */
export const iceOf_kg_kg = (b: Branches, turned: boolean, t_C: number): number =>
  turned ? ice_kg_kg(b.substance, t_C) : 0
