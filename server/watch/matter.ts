import type { Container, Product } from '../../config/schema/product.js'
import type { Learned } from '../../config/schema/site.js'
import {
  coldestFrozen_C,
  equilibriumEnthalpy_kJ_kg,
  ice_kg_kg as iceAt_kg_kg,
  liquidEnthalpy_kJ_kg,
  stop_C,
} from '../physics/curves.js'
import { latentHeat_kJ_kg } from '../physics/fusion.js'
import { type Substance, substanceOf } from '../physics/substance.js'
import { gradientOf } from './gradient.js'
import { type Kinetics, kineticsOf } from './hazard.js'
import type { Library } from './plan.js'

/** One monotone function of enthalpy on an even grid. */
type Table = {
  readonly from_kJ_kg: number
  readonly step_kJ_kg: number
  readonly T_C: Float64Array
}

/**
 * A product in its container, ready for the hot path: temperature read off either branch at an
 * enthalpy by one look-up. Enthalpies include the container's wall, per kg of product.
 */
export type Matter = {
  readonly substance: Substance
  readonly freezing_C: number
  readonly uFreezing_K: number
  /** Enthalpy of the liquid at its freezing point, wall included. */
  readonly hFreezing: number
  readonly fill_kg: number
  readonly wall_kJ_kgK: number
  /** UA per kg of product, kW/(kg K), and its relative standard uncertainty. */
  readonly coupling_kW_kgK: number
  readonly couplingRelU: number
  readonly UA_W_K: number
  /** Centre less mean, per kelvin between the item and its surroundings, while still. */
  readonly gradient: number
  /** Ice at −20 °C, or at the stop where that is warmer: what "solid" is measured against. */
  readonly solidIce_kg_kg: number
  readonly liquid: Table
  readonly ice: Table
  readonly kinetics: Kinetics
  readonly noExposure: readonly number[]
}

/** Liquid is read from here up; below, no liquid water is known and the slope of the end goes on. */
const liquidFrom_C = -40
const warmest_C = 60
/** Cells per branch: about 1 kJ/kg, which reads temperatures within 5 mK. */
const cells = 640
/** Steps in temperature from which the even grid in enthalpy is made. */
const fineSteps = 4000

/** T(h) on an even grid in h from pairs that rise together. */
const evenly = (h: readonly number[], T: readonly number[]): Table => {
  const from_kJ_kg = h[0]!
  const step_kJ_kg = (h.at(-1)! - from_kJ_kg) / cells
  const out = new Float64Array(cells + 1)
  let k = 0
  for (let i = 0; i <= cells; i++) {
    const want = from_kJ_kg + i * step_kJ_kg
    while (k < h.length - 2 && h[k + 1]! < want) k++
    const f = (want - h[k]!) / (h[k + 1]! - h[k]!)
    out[i] = T[k]! + Math.min(1, Math.max(0, f)) * (T[k + 1]! - T[k]!)
  }
  return { from_kJ_kg, step_kJ_kg, T_C: out }
}

const read = (table: Table, h: number): number => {
  const x = (h - table.from_kJ_kg) / table.step_kJ_kg
  const k = x <= 0 ? 0 : x >= cells - 1 ? cells - 1 : Math.floor(x)
  const a = table.T_C[k]!
  return a + (x - k) * (table.T_C[k + 1]! - a)
}

const slope = (table: Table, h: number): number => {
  const x = (h - table.from_kJ_kg) / table.step_kJ_kg
  const k = x <= 0 ? 0 : x >= cells - 1 ? cells - 1 : Math.floor(x)
  return (table.T_C[k + 1]! - table.T_C[k]!) / table.step_kJ_kg
}

/** Flattest plateau: pure water has none of its own slope. 1 kJ/kg then moves it by 10 µK. */
const leastSlope = 1e-5

/**
 * Temperature at an enthalpy, °C, wall included.
 *
 * @param onIce  true: the equilibrium branch, which above the freezing point is the liquid one
 */
export function temperature_C(m: Matter, onIce: boolean, h: number): number {
  return onIce && h < m.hFreezing ? read(m.ice, h) : read(m.liquid, h)
}

/** Apparent heat capacity at an enthalpy, kJ/(kg K), wall included. */
export function heatCapacity_kJ_kgK(m: Matter, onIce: boolean, h: number): number {
  const s = onIce && h < m.hFreezing ? slope(m.ice, h) : slope(m.liquid, h)
  return 1 / Math.max(leastSlope, s)
}

/** Enthalpy at a temperature, kJ/kg, wall included: the exact curve, not the table. */
export function enthalpy_kJ_kg(m: Matter, onIce: boolean, T_C: number): number {
  if (onIce && T_C < m.freezing_C)
    return (
      equilibriumEnthalpy_kJ_kg(m.substance, Math.max(coldestFrozen_C, T_C)) + m.wall_kJ_kgK * T_C
    )
  const T = Math.min(warmest_C, Math.max(liquidFrom_C, T_C))
  const h = liquidEnthalpy_kJ_kg(m.substance, T) + m.wall_kJ_kgK * T
  return h + (T_C - T) / slope(m.liquid, h)
}

/** Ice at an enthalpy on the equilibrium branch, kg per kg of product. */
export function ice_kg_kg(m: Matter, h: number): number {
  if (h >= m.hFreezing) return 0
  const T = read(m.ice, h)
  if (T <= liquidFrom_C) return iceAt_kg_kg(m.substance, T)
  // From the enthalpy, not from T: on the plateau of water T does not tell.
  const gap = liquidEnthalpy_kJ_kg(m.substance, T) + m.wall_kJ_kgK * T - h
  return Math.min(m.substance.water_kg_kg, Math.max(0, gap / latentHeat_kJ_kg(T)))
}

const area_m2 = (c: Container): number | null => {
  const { radius_m: r, height_m: h } = c
  switch (c.shape) {
    case 'cylinder':
      return r === undefined || h === undefined ? null : 2 * Math.PI * r * (r + h)
    case 'sphere':
      return r === undefined ? null : 4 * Math.PI * r * r
    case 'slab':
      // Both faces of a slab of water-like stuff of that thickness.
      return c.thickness_m === undefined ? null : (2 * c.fill_kg) / (1000 * c.thickness_m)
    case 'box': {
      const { length_m: l, width_m: w, height_m: z } = c
      return l === undefined || w === undefined || z === undefined
        ? null
        : 2 * (l * w + l * z + w * z)
    }
    default:
      return null
  }
}

/** Where neither UA nor a film is given: still air over a compact body of water [common practice]. */
const stillAir_W_m2K = 8
const compactArea_m2 = (fill_kg: number): number => 6 * (fill_kg / 1000) ** (2 / 3)

const couplingOf = (c: Container, learned: Learned | null): { UA_W_K: number; relU: number } => {
  if (learned !== null) return { UA_W_K: learned.UA_W_K, relU: learned.relU }
  if (c.UA_W_K !== undefined) return { UA_W_K: c.UA_W_K, relU: c.UA_relU }
  const area = area_m2(c) ?? compactArea_m2(c.fill_kg)
  if (c.h_W_m2K !== undefined) return { UA_W_K: c.h_W_m2K * area, relU: c.UA_relU }
  return { UA_W_K: stillAir_W_m2K * area, relU: 0.5 }
}

/** Least relative uncertainty of a coupling: air moves differently from day to day. */
const leastRelU = 0.1

const cache = new WeakMap<Product, Map<Container, Map<Learned | null, Matter>>>()

/**
 * A product in its container, its tables made once.
 *
 * @throws Refusal where the product cannot be understood
 */
export function matterOf(
  product: Product,
  container: Container,
  learned: Learned | null,
  library: Library,
): Matter {
  const byContainer = cache.get(product) ?? new Map<Container, Map<Learned | null, Matter>>()
  cache.set(product, byContainer)
  const byLearned = byContainer.get(container) ?? new Map<Learned | null, Matter>()
  byContainer.set(container, byLearned)
  const known = byLearned.get(learned)
  if (known !== undefined) return known
  const made = make(product, container, learned, library)
  byLearned.set(learned, made)
  return made
}

const make = (
  product: Product,
  container: Container,
  learned: Learned | null,
  library: Library,
): Matter => {
  const substance = substanceOf(product, library.solutes)
  const { fill_kg } = container
  const wall_kJ_kgK = container.wall_kJ_K / fill_kg
  const f = substance.freezingPoint_C
  const liquidT = Array.from(
    { length: fineSteps + 1 },
    (_, i) => liquidFrom_C + (i * (warmest_C - liquidFrom_C)) / fineSteps,
  )
  const liquid = evenly(
    liquidT.map((T) => liquidEnthalpy_kJ_kg(substance, T) + wall_kJ_kgK * T),
    liquidT,
  )
  // Finer towards the freezing point, where most of the latent heat is: cubic spacing.
  const below = Array.from({ length: fineSteps + 1 }, (_, i) => {
    const x = 1 - i / fineSteps
    return f - 1e-7 - (f - coldestFrozen_C - 1e-6) * x * x * x
  })
  const hE = below.map((T) => equilibriumEnthalpy_kJ_kg(substance, T) + wall_kJ_kgK * T)
  const hFreezing = liquidEnthalpy_kJ_kg(substance, f) + wall_kJ_kgK * f
  const rising = [...hE, hFreezing].reduce<{ h: number[]; T: number[] }>(
    (out, h, i) => {
      if (out.h.length === 0 || h > out.h.at(-1)! + 1e-9) {
        out.h.push(h)
        out.T.push(below[i] ?? f)
      }
      return out
    },
    { h: [], T: [] },
  )
  const { UA_W_K, relU } = couplingOf(container, learned)
  const kinetics = kineticsOf(product, fill_kg, library)
  return {
    substance,
    freezing_C: f,
    uFreezing_K: Math.max(substance.freezingPoint_u_K, 0.002),
    hFreezing,
    fill_kg,
    wall_kJ_kgK,
    coupling_kW_kgK: UA_W_K / 1000 / fill_kg,
    couplingRelU: Math.max(leastRelU, relU),
    UA_W_K,
    gradient: gradientOf(container, UA_W_K, area_m2(container)),
    solidIce_kg_kg: iceAt_kg_kg(substance, Math.max(-20, stop_C(substance))),
    liquid,
    ice: evenly(rising.h, rising.T),
    kinetics,
    noExposure: kinetics.exponents.map(() => 0),
  }
}
