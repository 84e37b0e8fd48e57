import type { Container, Product } from '../../config/schema/product.js'
import type { Learned } from '../../config/schema/site.js'
import { coldestFrozen_C, coldestLiquid_C, warmest_C } from '../physics/constants.js'
import { area_m2, couplingOf, fillVolume_m3, wallShare_kJ_kgK } from '../physics/container.js'
import { endOfFreezing_C, hEquilibrium, hLiquid, iceAt } from '../physics/curves.js'
import {
  type Fast,
  fastIce_kg_kg,
  fastLiquid_C,
  fastLiquidCp,
  fastOnIce_C,
  fastOnIceCp,
  tableOf,
} from '../physics/fast.js'
import { type Exposure, type Kinetics, kineticsOf, noExposure } from '../physics/nucleation.js'
import { type Substance, substanceOf } from '../physics/substance.js'
import { gradientOf, settlingOf } from './gradient.js'
import type { Library } from './plan.js'

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
  /** Both branches as tables, wall included. */
  readonly branches: Fast
  readonly kinetics: Kinetics
  readonly noExposure: Exposure
}

/** On a plateau a heat capacity has no end; 1 kJ/kg then moves it by 10 µK. */
const mostCp_kJ_kgK = 1e5

/**
 * Temperature at an enthalpy, °C, wall included.
 *
 * @param onIce  true: the equilibrium branch, which above the freezing point is the liquid one
 */
export const temperature_C = (m: Matter, onIce: boolean, h: number): number =>
  onIce ? fastOnIce_C(m.branches, h) : fastLiquid_C(m.branches, h)

/** Apparent heat capacity at an enthalpy, kJ/(kg K), wall included. */
export const heatCapacity_kJ_kgK = (m: Matter, onIce: boolean, h: number): number =>
  Math.min(mostCp_kJ_kgK, onIce ? fastOnIceCp(m.branches, h) : fastLiquidCp(m.branches, h))

/** Enthalpy at a temperature, kJ/kg, wall included: the exact curve, not the table. */
export function enthalpy_kJ_kg(m: Matter, onIce: boolean, T_C: number): number {
  if (onIce && T_C < m.freezing_C)
    return hEquilibrium(m.substance, Math.max(coldestFrozen_C, T_C)) + m.wall_kJ_kgK * T_C
  const T = Math.min(warmest_C, Math.max(coldestLiquid_C, T_C))
  const h = hLiquid(m.substance, T) + m.wall_kJ_kgK * T
  return h + (T_C - T) * heatCapacity_kJ_kgK(m, false, h)
}

/** Ice at an enthalpy on the equilibrium branch, kg per kg of product. */
export const ice_kg_kg = (m: Matter, h: number): number => fastIce_kg_kg(m.branches, h)

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
  const branches = tableOf(substance, wall_kJ_kgK)
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
    hFreezing: branches.hFreezing_kJ_kg,
    fill_kg,
    wall_kJ_kgK,
    coupling_kW_kgK: UA_W_K / 1000 / fill_kg,
    // Stated as a bound (±30 % of a table value), read as a rectangle: its standard uncertainty is a/√3.
    couplingRelU: Math.max(leastRelU, relU / Math.sqrt(3)),
    UA_W_K,
    settle_s: settlingOf(container),
    gradient: gradientOf(container, UA_W_K, areaOf_m2(container)),
    solidIce_kg_kg: iceAt(substance, Math.max(-20, endOfFreezing_C(substance))),
    branches,
    kinetics,
    noExposure: noExposure(kinetics),
  }
}
