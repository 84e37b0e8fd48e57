import { within_C } from './range.js'

/** Parts of a food that are not water, kg per kg of food. */
export type FoodParts = {
  readonly protein_kg_kg: number
  readonly fat_kg_kg: number
  readonly carbohydrate_kg_kg: number
  readonly fibre_kg_kg: number
  readonly ash_kg_kg: number
}

/** a + b t + c t². */
type Quadratic = readonly [number, number, number]

/**
 * Heat capacities of Choi and Okos 1986, kJ/(kg K), t in °C, −40 … 150 °C, as ASHRAE prints them.
 * [from memory, cross-checked against four public codes, each of which differs in a digit]
 */
const cp: Readonly<Record<keyof FoodParts, Quadratic>> = {
  protein_kg_kg: [2.0082, 1.2089e-3, -1.3129e-6],
  fat_kg_kg: [1.9842, 1.4733e-3, -4.8008e-6],
  carbohydrate_kg_kg: [1.5488, 1.9625e-3, -5.9399e-6],
  fibre_kg_kg: [1.8459, 1.8306e-3, -4.6509e-6],
  ash_kg_kg: [1.0926, 1.8896e-3, -3.6817e-6],
}

/** Densities of Choi and Okos 1986, kg/m³, as above. */
const density: Readonly<Record<keyof FoodParts, Quadratic>> = {
  protein_kg_kg: [1329.9, -0.5184, 0],
  fat_kg_kg: [925.59, -0.41757, 0],
  carbohydrate_kg_kg: [1599.1, -0.31046, 0],
  fibre_kg_kg: [1311.5, -0.36589, 0],
  ash_kg_kg: [2423.8, -0.28063, 0],
}

const parts = [
  'protein_kg_kg',
  'fat_kg_kg',
  'carbohydrate_kg_kg',
  'fibre_kg_kg',
  'ash_kg_kg',
] as const
const at = ([a, b, c]: Quadratic, t: number): number => a + t * (b + t * c)

/** Bound water per kg of protein, kg/kg (ASHRAE Refrigeration, thermal properties of foods). */
export const boundPerProtein = 0.4

/** Heat capacity of one part of a food, kJ/(kg K), −40 … 150 °C (Choi and Okos 1986). */
export function foodPartCp_kJ_kgK(part: keyof FoodParts, t_C: number): number {
  return at(cp[part], within_C(t_C, -40, 150, 'a food'))
}

/** Density of one part of a food, kg/m³, −40 … 150 °C (Choi and Okos 1986). */
export function foodPartDensity_kg_m3(part: keyof FoodParts, t_C: number): number {
  return at(density[part], within_C(t_C, -40, 150, 'a food'))
}

/**
 * Heat capacity of all in a food that is not water: the mass mean of its parts.
 *
 * @param t_C  −40 … 150 °C
 * @returns    kJ/(kg K); null where no part is named
 * @source     Choi and Okos 1986
 */
export function foodOtherCp_kJ_kgK(food: FoodParts, t_C: number): number | null {
  const mass = parts.reduce((sum, part) => sum + food[part], 0)
  if (!(mass > 0)) return null
  return parts.reduce((sum, part) => sum + food[part] * foodPartCp_kJ_kgK(part, t_C), 0) / mass
}
