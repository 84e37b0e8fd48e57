import type { Freezing, ProductPhysics, Stop } from '../../config/schema/product.js'
import { Refusal } from '../../config/schema/refusal.js'
import { pureMelting_C } from './constants.js'
import {
  equilibriumOsmolality_osmol_kg,
  equilibriumOsmolalitySlope,
  equilibriumTemperature_C,
} from './equilibrium.js'
import { boundWater_kg_kg, otherParts_cp_kJ_kgK } from './food.js'
import { type SoluteTable, type Term, termsOf, waterPerMol_kg } from './solution.js'

/** A product as the physics sees it, whichever of the five forms it was given in. */
export type Substance = {
  readonly water_kg_kg: number
  readonly bound_kg_kg: number
  readonly freezingPoint_C: number
  readonly freezingPoint_u_K: number
  /** Osmolality of the liquid before any ice. */
  readonly osmolality_osmol_kg: number
  /** Osmol per kg of product, where the form gives no solutes. */
  readonly ideal_osmol_kg: number
  readonly terms: readonly Term[]
  readonly other_cp_kJ_kgK: number
  readonly stop: Stop | null
}

/** Coldest temperature of the equilibrium relation; with no stop, freezing ends there. */
export const coldestEquilibrium_C = -40

/**
 * Liquid water left in equilibrium with ice, kg per kg of product:
 *
 *     w_liq = N/π + B + Σ n_i (1/m_i(π))
 *
 * @param π  osmolality, above 0
 */
export function liquidWater_kg_kg(
  s: Pick<Substance, 'ideal_osmol_kg' | 'bound_kg_kg' | 'terms'>,
  π: number,
): number {
  let w = s.ideal_osmol_kg / π + s.bound_kg_kg
  for (const term of s.terms) w += term.n_mol_kg * waterPerMol_kg(term, π)
  return w
}

/** Heat capacity of solutes by class, kJ/(kg K) (rulings.md 8; salts after gsw cp of seawater). */
const cpOfClass = { salt: -2.7, other: 1.4, glycol: 2.4 } as const

/** Standard uncertainty where a product states none: of a measured point, relative of an osmolality… */
const standardU = {
  measured_K: 0.02,
  osmolality: 0.02,
  solution: 0.03,
  food_K: 0.3,
  water_K: 0.002,
} as const

type Core = Pick<
  Substance,
  | 'water_kg_kg'
  | 'bound_kg_kg'
  | 'ideal_osmol_kg'
  | 'terms'
  | 'other_cp_kJ_kgK'
  | 'osmolality_osmol_kg'
>

const coreOf = (f: Freezing, table: SoluteTable): Core => {
  if (f.kind === 'water')
    return {
      water_kg_kg: 1,
      bound_kg_kg: 0,
      ideal_osmol_kg: 0,
      terms: [],
      other_cp_kJ_kgK: 1.4,
      osmolality_osmol_kg: 0,
    }
  if (f.kind === 'solution') {
    const terms = termsOf(f.solutes, table)
    const solute_kg_kg = f.solutes.reduce((sum, x) => sum + x.kg_kg, 0)
    const water_kg_kg = 1 - solute_kg_kg
    const cp =
      solute_kg_kg === 0
        ? 1.4
        : terms.reduce(
            (sum, t) =>
              sum + ((t.n_mol_kg * t.solute.molarMass_g_mol) / 1000) * cpOfClass[t.solute.class],
            0,
          ) / solute_kg_kg
    const core = {
      water_kg_kg,
      bound_kg_kg: 0,
      ideal_osmol_kg: 0,
      terms,
      other_cp_kJ_kgK: cp,
      osmolality_osmol_kg: 0,
    }
    return {
      ...core,
      osmolality_osmol_kg: terms.length === 0 ? 0 : osmolalityHolding(core, water_kg_kg),
    }
  }
  const bound_kg_kg = f.kind === 'food' ? boundWater_kg_kg(f) : f.bound_kg_kg
  if (bound_kg_kg >= f.water_kg_kg)
    throw new Refusal(
      'no-free-water',
      'freezing.bound_kg_kg',
      bound_kg_kg,
      `all of the water (${f.water_kg_kg}) is bound`,
      'give less bound water, or more water',
    )
  const π =
    f.kind === 'osmolality'
      ? f.osmolality_osmol_kg
      : equilibriumOsmolality_osmol_kg(Math.max(coldestEquilibrium_C, f.freezingPoint_C))
  return {
    water_kg_kg: f.water_kg_kg,
    bound_kg_kg,
    ideal_osmol_kg: π * (f.water_kg_kg - bound_kg_kg),
    terms: [],
    other_cp_kJ_kgK: f.kind === 'food' ? otherParts_cp_kJ_kgK(f) : 1.4,
    osmolality_osmol_kg: π,
  }
}

/** Osmolality at which so much liquid water is held: `liquidWater_kg_kg` solved by bisection. */
function osmolalityHolding(
  s: Pick<Substance, 'ideal_osmol_kg' | 'bound_kg_kg' | 'terms'>,
  water_kg_kg: number,
): number {
  let low = 1e-9
  let high = equilibriumOsmolality_osmol_kg(coldestEquilibrium_C)
  if (liquidWater_kg_kg(s, high) > water_kg_kg)
    throw new Refusal(
      'too-concentrated',
      'freezing.solutes',
      water_kg_kg,
      'it freezes below −40 °C, which the equations do not reach',
      'give a measured freezing point, or a weaker solution',
    )
  for (let i = 0; i < 100; i++) {
    const middle = (low + high) / 2
    if (liquidWater_kg_kg(s, middle) > water_kg_kg) low = middle
    else high = middle
  }
  return (low + high) / 2
}

const uncertainty_K = (f: Freezing, π: number, freezingPoint_C: number): number => {
  if (f.u_K !== undefined) return f.u_K
  const perOsmol_K = 1 / Math.abs(equilibriumOsmolalitySlope(Math.min(freezingPoint_C, 0)))
  const relative = (relU: number) => relU * π * perOsmol_K
  if (f.relU !== undefined) return relative(f.relU)
  switch (f.kind) {
    case 'measured':
      return standardU.measured_K
    case 'osmolality':
      return relative(standardU.osmolality)
    case 'solution':
      return relative(standardU.solution)
    case 'food':
      return standardU.food_K
    case 'water':
      return standardU.water_K
  }
}

/**
 * A product in the one form that the curves work with.
 *
 * @param solutes  config/library/solutes.json
 * @throws Refusal for an unknown solute, or where no free water is left
 */
export function substanceOf(product: ProductPhysics, solutes: SoluteTable): Substance {
  const core = coreOf(product.freezing, solutes)
  const freezingPoint_C =
    core.osmolality_osmol_kg === 0
      ? pureMelting_C
      : equilibriumTemperature_C(core.osmolality_osmol_kg)
  return {
    ...core,
    other_cp_kJ_kgK: product.liquidOther_cp_kJ_kgK ?? core.other_cp_kJ_kgK,
    freezingPoint_C,
    freezingPoint_u_K: uncertainty_K(product.freezing, core.osmolality_osmol_kg, freezingPoint_C),
    stop:
      product.stop ??
      (product.stop_C === undefined ? null : { T_C: product.stop_C, kind: 'glass' }),
  }
}
