import type { Freezing, ProductPhysics, Stop } from '../../config/schema/product.js'
import { Refusal } from '../../config/schema/refusal.js'
import { coldestLiquid_C, pureMelting_C } from './constants.js'
import { equilibriumTemperature_C, osmolalityAt, osmolalitySlope } from './equilibrium.js'
import { boundPerProtein, foodOtherCp_kJ_kgK } from './food.js'
import { liquidWater_kg_kg, type SoluteTable, solutionOf, type WaterDemand } from './solution.js'
import { cpOfLiquid, iceCp_kJ_kgK } from './water.js'

/** A product as its water demand: one formulation for pharma and food. */
export type Substance = {
  readonly freezingPoint_C: number
  /** Standard uncertainty of the freezing point, K. */
  readonly freezingPoint_u_K: number
  /** Osmolality while it holds no ice, osmol per kg of water. */
  readonly osmolality_osmol_kg: number
  readonly water_kg_kg: number
  /** Water that never freezes. */
  readonly bound_kg_kg: number
  /** w_liq(π) = N/π + B + Gπ + Dπ², by ranges of π. */
  readonly pieces: readonly WaterDemand[]
  /** Apparent heat capacity of all that is not water, kJ per kg of it and K; below 0 for salts. */
  readonly otherCp_kJ_kgK: number
  /** Below it nothing more freezes; null: freeze concentration goes on to −40 °C. */
  readonly stop: Stop | null
  /** The freezing point itself lies beyond the fit of a solute, or below −40 °C. */
  readonly extrapolated: boolean
  /** Ice colder than this rests on an extrapolated fit; null where no fit ends above −40 °C. */
  readonly extrapolatedBelow_C: number | null
}

/** What a form says, before uncertainty and stop are settled. */
type Core = {
  readonly water_kg_kg: number
  readonly bound_kg_kg: number
  readonly pieces: readonly WaterDemand[]
  readonly freezingPoint_C: number
  readonly otherCp_kJ_kgK: number
  readonly fitEnd_osmol_kg: number
}

/** A standard uncertainty of the freezing point where the product states none, and its reason. */
const defaults = {
  /** Cryoscope or osmometer in daily use: ±0.01–0.02 K [common practice]. */
  measured: { u_K: 0.02 },
  /** Freezing-point osmometer, 2 % [common practice]. */
  osmolality: { relU: 0.02 },
  /** Composition: fit and mixing rule ±2–3 % of the depression. */
  solution: { relU: 0.03 },
  /** Tables of foods: ±0.2–0.5 K between samples (ASHRAE Refrigeration). */
  food: { u_K: 0.3 },
  /** Air-free or air-saturated, 2.4 mK apart: half of it. */
  water: { u_K: 0.0012 },
} as const

/** Apparent heat capacity of what is dissolved, where only an osmolality or a point is known. */
const unknownSolutesCp_kJ_kgK = 1.4

/** No freezing point is stated below this: a solution so strong does not freeze in any store. */
const coldestFreezing_C = -100

const ofNoFit = Number.POSITIVE_INFINITY

const demand = (N: number, B: number): WaterDemand[] => [
  { to_osmol_kg: Number.POSITIVE_INFINITY, N, B, G: 0, D: 0 },
]

const freezable = (water_kg_kg: number, bound_kg_kg: number): number => {
  if (!(water_kg_kg > 0))
    throw new Refusal(
      'no-water',
      'freezing.water_kg_kg',
      water_kg_kg,
      'without water nothing freezes here',
      'give kg of water per kg of product, above 0',
    )
  if (!(bound_kg_kg < water_kg_kg))
    throw new Refusal(
      'all-bound',
      'freezing.bound_kg_kg',
      bound_kg_kg,
      `all of the water (${water_kg_kg} kg/kg) would be bound`,
      'give less bound water than water',
    )
  return water_kg_kg - bound_kg_kg
}

/** N from the point at which the first ice forms. */
const fromPoint = (
  given_C: number,
  water_kg_kg: number,
  bound_kg_kg: number,
): Omit<Core, 'otherCp_kJ_kgK'> => {
  const free = freezable(water_kg_kg, bound_kg_kg)
  const freezingPoint_C = Math.min(given_C, pureMelting_C)
  return {
    water_kg_kg,
    bound_kg_kg,
    pieces: demand(osmolalityAt(freezingPoint_C) * free, bound_kg_kg),
    freezingPoint_C,
    fitEnd_osmol_kg: ofNoFit,
  }
}

/** Osmolality at which all of the water is wanted: w_liq(π) = w0. */
function osmolalityOf(pieces: readonly WaterDemand[], water_kg_kg: number): number {
  let low = 0
  let high = 1
  for (let k = 0; k < 40 && liquidWater_kg_kg(pieces, high) > water_kg_kg; k++) {
    low = high
    high *= 2
  }
  for (let k = 0; k < 100 && high - low > 1e-15 * high; k++) {
    const middle = (low + high) / 2
    if (liquidWater_kg_kg(pieces, middle) > water_kg_kg) low = middle
    else high = middle
  }
  return (low + high) / 2
}

function coreOf(freezing: Freezing, table: SoluteTable): Core {
  switch (freezing.kind) {
    case 'measured':
      return {
        ...fromPoint(freezing.freezingPoint_C, freezing.water_kg_kg, freezing.bound_kg_kg),
        otherCp_kJ_kgK: unknownSolutesCp_kJ_kgK,
      }
    case 'osmolality': {
      const free = freezable(freezing.water_kg_kg, freezing.bound_kg_kg)
      return {
        water_kg_kg: freezing.water_kg_kg,
        bound_kg_kg: freezing.bound_kg_kg,
        pieces: demand(freezing.osmolality_osmol_kg * free, freezing.bound_kg_kg),
        freezingPoint_C: equilibriumTemperature_C(freezing.osmolality_osmol_kg),
        otherCp_kJ_kgK: unknownSolutesCp_kJ_kgK,
        fitEnd_osmol_kg: ofNoFit,
      }
    }
    case 'solution': {
      const solution = solutionOf(freezing.solutes, table, 'freezing.solutes')
      freezable(solution.water_kg_kg, 0)
      return {
        ...solution,
        bound_kg_kg: 0,
        freezingPoint_C: equilibriumTemperature_C(
          osmolalityOf(solution.pieces, solution.water_kg_kg),
        ),
      }
    }
    case 'food':
      return {
        ...fromPoint(
          freezing.freezingPoint_C,
          freezing.water_kg_kg,
          freezing.bound_kg_kg ?? boundPerProtein * freezing.protein_kg_kg,
        ),
        otherCp_kJ_kgK: foodOtherCp_kJ_kgK(freezing, 0) ?? unknownSolutesCp_kJ_kgK,
      }
    case 'water':
      return {
        ...fromPoint(pureMelting_C, 1, 0),
        otherCp_kJ_kgK: unknownSolutesCp_kJ_kgK,
      }
  }
}

const stopOf = (product: ProductPhysics, freezingPoint_C: number): Stop | null => {
  if (product.stop !== undefined && product.stop_C !== undefined)
    throw new Refusal(
      'given-twice',
      'stop_C',
      product.stop_C,
      'the stop is given twice',
      'give `stop` or `stop_C`, not both',
    )
  const stop =
    product.stop ??
    (product.stop_C === undefined ? null : { T_C: product.stop_C, kind: 'glass' as const })
  if (stop !== null && !(stop.T_C < freezingPoint_C))
    throw new Refusal(
      'stop-above-freezing',
      product.stop === undefined ? 'stop_C' : 'stop.T_C',
      stop.T_C,
      `freezing would stop before it begins, at ${freezingPoint_C.toFixed(2)} °C`,
      'give the eutectic or glass temperature of the freeze-concentrated liquid',
    )
  // Colder than the coldest liquid it stops nothing that the model can freeze.
  return stop !== null && stop.T_C > coldestLiquid_C ? stop : null
}

/** Standard uncertainty of the freezing point: what is given, else the default of the form. */
const uncertaintyOf = (
  freezing: Freezing,
  freezingPoint_C: number,
  extrapolated: boolean,
): number => {
  const given =
    freezing.u_K !== undefined || freezing.relU !== undefined ? freezing : defaults[freezing.kind]
  const π = osmolalityAt(freezingPoint_C)
  const ofOsmolality = (π / osmolalitySlope(freezingPoint_C)) * (extrapolated ? 2 : 1)
  const u = 'u_K' in given ? (given.u_K ?? 0) : 0
  const rel = 'relU' in given ? (given.relU ?? 0) : 0
  return Math.hypot(u, rel * ofOsmolality)
}

/** The least that a kilogram of product may take up per kelvin, kJ/(kg K): more than rounding. */
const leastCp_kJ_kgK = 0.02
/** Where it is looked at: the liquid's own least, and ice at any depth, °C. */
const looked_C = [25, 0, -2, -5, -10, -15, -20, -25, -30, -35, -40]

/** Without latent heat, what either branch takes up must be above 0, or no enthalpy names a T. */
const mustHoldHeat = (core: Core, otherCp_kJ_kgK: number, stop: Stop | null): void => {
  const other = (1 - core.water_kg_kg) * otherCp_kJ_kgK
  const holds = looked_C.every((t) => {
    const liquid = core.water_kg_kg * cpOfLiquid(t) + other
    if (t >= core.freezingPoint_C) return liquid > leastCp_kJ_kgK
    const solid = stop?.kind === 'eutectic' && t < stop.T_C
    const left = solid
      ? core.bound_kg_kg
      : liquidWater_kg_kg(core.pieces, osmolalityAt(Math.max(t, stop?.T_C ?? t)))
    const onIce = left * cpOfLiquid(t) + (core.water_kg_kg - left) * iceCp_kJ_kgK(t) + other
    return Math.min(liquid, onIce) > leastCp_kJ_kgK
  })
  if (holds) return
  throw new Refusal(
    'no-heat-capacity',
    'liquidOther_cp_kJ_kgK',
    otherCp_kJ_kgK,
    'the product would give off heat when warmed',
    'give the apparent heat capacity of all that is not water; dissolved salts have about −2.7',
  )
}

/**
 * A product as one substance, whichever of the five forms says how it freezes.
 *
 *     ice x(t) = w0 − w_liq(π_eq(t))       first ice where w_liq = w0
 *
 * @param product  fractions in kg per kg of product
 * @param table    the solute table (config/library/solutes.json)
 * @throws         Refusal with the field: unknown solute, no free water, a stop above the freezing
 *                 point, a heat capacity that cannot be
 */
export function substanceOf(product: ProductPhysics, table: SoluteTable): Substance {
  const core = coreOf(product.freezing, table)
  const freezingPoint_C = Math.max(core.freezingPoint_C, coldestFreezing_C)
  const π = osmolalityAt(freezingPoint_C)
  const otherCp_kJ_kgK = product.liquidOther_cp_kJ_kgK ?? core.otherCp_kJ_kgK
  const stop = stopOf(product, freezingPoint_C)
  mustHoldHeat(core, otherCp_kJ_kgK, stop)
  const extrapolated = π > core.fitEnd_osmol_kg || freezingPoint_C < coldestLiquid_C
  const fitEnd_C = equilibriumTemperature_C(core.fitEnd_osmol_kg)
  return {
    freezingPoint_C,
    freezingPoint_u_K: uncertaintyOf(product.freezing, freezingPoint_C, extrapolated),
    osmolality_osmol_kg: π,
    water_kg_kg: core.water_kg_kg,
    bound_kg_kg: core.bound_kg_kg,
    pieces: core.pieces,
    otherCp_kJ_kgK,
    stop,
    extrapolated,
    extrapolatedBelow_C: fitEnd_C > coldestLiquid_C ? fitEnd_C : null,
  }
}
