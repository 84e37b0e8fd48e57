import type { Container, Product } from '../../config/schema/product.js'
import type { Learned } from '../../config/schema/site.js'
import { equilibriumFrom, liquidTemperature_C } from '../physics/branches.js'
import { coldestLiquid_C, warmest_C } from '../physics/constants.js'
import { area_m2, couplingOf, fillVolume_m3, wallShare_kJ_kgK } from '../physics/container.js'
import { endOfFreezing_C, hEquilibrium, hLiquid, iceAt } from '../physics/curves.js'
import { type Exposure, type Kinetics, kineticsOf, noExposure } from '../physics/nucleation.js'
import { type Substance, substanceOf } from '../physics/substance.js'
import { gradientOf, settlingOf } from './gradient.js'
import type { Library } from './plan.js'

/** One monotone function of enthalpy on an even grid. */
type Table = {
  readonly from_kJ_kg: number
  readonly step_kJ_kg: number
  readonly T_C: Float64Array
  readonly ice_kg_kg: Float64Array
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
  /** Time in which a change of the surroundings reaches the inside by conduction, s. */
  readonly settle_s: number
  /** Ice at −20 °C, or at the stop where that is warmer: what "solid" is measured against. */
  readonly solidIce_kg_kg: number
  readonly liquid: Table
  readonly ice: Table
  readonly kinetics: Kinetics
  readonly noExposure: Exposure
}

/** The tables of the ice branch begin here; colder, the slope of their end goes on. */
const coldest_C = -120
/** Cells per branch: about 1 kJ/kg, which reads temperatures within 5 mK. */
const cells = 640

/** Temperature and ice on an even grid in enthalpy. */
const evenly = (
  from_kJ_kg: number,
  to_kJ_kg: number,
  at: (h: number) => { readonly T_C: number; readonly ice_kg_kg: number },
): Table => {
  const step_kJ_kg = (to_kJ_kg - from_kJ_kg) / cells
  const T_C = new Float64Array(cells + 1)
  const ice_kg_kg = new Float64Array(cells + 1)
  for (let i = 0; i <= cells; i++) {
    const found = at(from_kJ_kg + i * step_kJ_kg)
    T_C[i] = found.T_C
    ice_kg_kg[i] = found.ice_kg_kg
  }
  return { from_kJ_kg, step_kJ_kg, T_C, ice_kg_kg }
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
    return hEquilibrium(m.substance, Math.max(-200, T_C)) + m.wall_kJ_kgK * T_C
  const T = Math.min(warmest_C, Math.max(coldestLiquid_C, T_C))
  const h = hLiquid(m.substance, T) + m.wall_kJ_kgK * T
  return h + (T_C - T) / slope(m.liquid, h)
}

/** Ice at an enthalpy on the equilibrium branch, kg per kg of product. */
export function ice_kg_kg(m: Matter, h: number): number {
  if (h >= m.hFreezing) return 0
  const x = (h - m.ice.from_kJ_kg) / m.ice.step_kJ_kg
  const k = x <= 0 ? 0 : x >= cells - 1 ? cells - 1 : Math.floor(x)
  const f = Math.max(0, x - k)
  return m.ice.ice_kg_kg[k]! + f * (m.ice.ice_kg_kg[k + 1]! - m.ice.ice_kg_kg[k]!)
}

/** Area of a container whose shape is told with all its lengths, m². */
const areaOf_m2 = (c: Container): number | null => {
  const lengths = {
    cylinder: [c.radius_m, c.height_m],
    sphere: [c.radius_m],
    slab: [c.thickness_m],
    box: [c.length_m, c.width_m, c.height_m],
  }
  return c.shape === undefined || lengths[c.shape].includes(undefined) ? null : area_m2(c)
}

/** Where neither UA nor a film is given: still air over a compact body of water [common practice]. */
const stillAir_W_m2K = 8
const compactArea_m2 = (fill_kg: number): number => 6 * (fill_kg / 1000) ** (2 / 3)

const coupledBy = (c: Container, learned: Learned | null): { UA_W_K: number; relU: number } =>
  learned ??
  couplingOf(c) ?? {
    UA_W_K: stillAir_W_m2K * (areaOf_m2(c) ?? compactArea_m2(c.fill_kg)),
    relU: 0.5,
  }

/** Least relative uncertainty of a coupling: air moves differently from day to day. */
const leastRelU = 0.1

/** Two items of one product in one container share their tables. */
type Kept = {
  readonly container: Container
  readonly learned: Learned | null
  readonly frozenBefore: boolean
  readonly matter: Matter
}
const cache = new WeakMap<Product, Kept[]>()

/**
 * A product in its container, its tables made once.
 *
 * @throws Refusal where the product cannot be understood
 */
export function matterOf(
  product: Product,
  container: Container,
  learned: Learned | null,
  frozenBefore: boolean,
  library: Library,
): Matter {
  const kept = cache.get(product) ?? []
  const known = kept.find(
    (k) => k.container === container && k.learned === learned && k.frozenBefore === frozenBefore,
  )
  if (known !== undefined) return known.matter
  const matter = make(product, container, learned, frozenBefore, library)
  cache.set(product, [...kept, { container, learned, frozenBefore, matter }])
  return matter
}

const make = (
  product: Product,
  container: Container,
  learned: Learned | null,
  frozenBefore: boolean,
  library: Library,
): Matter => {
  const substance = substanceOf(product, library.solutes)
  const { fill_kg } = container
  const wall_kJ_kgK = wallShare_kJ_kgK(container)
  const f = substance.freezingPoint_C
  const liquidAt = (T: number) => hLiquid(substance, T) + wall_kJ_kgK * T
  const hFreezing = liquidAt(Math.max(f, coldestLiquid_C))
  const liquid = evenly(liquidAt(coldestLiquid_C), liquidAt(warmest_C), (h) => ({
    T_C: liquidTemperature_C(substance, wall_kJ_kgK, h),
    ice_kg_kg: 0,
  }))
  const ice = evenly(hEquilibrium(substance, coldest_C) + wall_kJ_kgK * coldest_C, hFreezing, (h) =>
    equilibriumFrom(substance, wall_kJ_kgK, h),
  )
  const { UA_W_K, relU } = coupledBy(container, learned)
  const kinetics = kineticsOf(
    library.priors,
    product.nucleation,
    fillVolume_m3(container),
    frozenBefore,
  )
  return {
    substance,
    freezing_C: f,
    uFreezing_K: Math.max(substance.freezingPoint_u_K, 0.002),
    hFreezing,
    fill_kg,
    wall_kJ_kgK,
    coupling_kW_kgK: UA_W_K / 1000 / fill_kg,
    // Stated as a bound (±30 % of a table value), read as a rectangle: its standard uncertainty is a/√3.
    couplingRelU: Math.max(leastRelU, relU / Math.sqrt(3)),
    UA_W_K,
    settle_s: settlingOf(container),
    gradient: gradientOf(container, UA_W_K, areaOf_m2(container)),
    solidIce_kg_kg: iceAt(substance, Math.max(-20, endOfFreezing_C(substance))),
    liquid,
    ice,
    kinetics,
    noExposure: noExposure(kinetics),
  }
}
