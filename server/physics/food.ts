import type { Freezing } from '../../config/schema/product.js'

type Food = Extract<Freezing, { kind: 'food' }>

/** Bound water per kg of protein (ASHRAE Refrigeration, thermal properties of foods [from memory]). */
const boundPerProtein = 0.4

/** Heat capacities of the parts at 0 °C, kJ/(kg K) (Choi, Okos 1986 [from memory]). */
const cp0_kJ_kgK = {
  protein: 2.0082,
  fat: 1.9842,
  carbohydrate: 1.5488,
  fibre: 1.8459,
  ash: 1.0926,
}

export const boundWater_kg_kg = (food: Food): number =>
  food.bound_kg_kg ?? boundPerProtein * food.protein_kg_kg

/** Mean heat capacity at 0 °C of all of a food that is not water; protein's where nothing is named. */
export function otherParts_cp_kJ_kgK(food: Food): number {
  const parts = [
    [food.protein_kg_kg, cp0_kJ_kgK.protein],
    [food.fat_kg_kg, cp0_kJ_kgK.fat],
    [food.carbohydrate_kg_kg, cp0_kJ_kgK.carbohydrate],
    [food.fibre_kg_kg, cp0_kJ_kgK.fibre],
    [food.ash_kg_kg, cp0_kJ_kgK.ash],
  ] as const
  const mass = parts.reduce((sum, [w]) => sum + w, 0)
  return mass > 0 ? parts.reduce((sum, [w, cp]) => sum + w * cp, 0) / mass : cp0_kJ_kgK.carbohydrate
}
