import { readLibrary } from '../../config/library/read.js'
import type { ProductPhysics } from '../../config/schema/product.js'
import { type Substance, substanceOf } from '../../server/physics/substance.js'

export const library = readLibrary()

/** A solution by name and mass fraction. */
export const solution = (
  solutes: Readonly<Record<string, number>>,
  rest: Omit<ProductPhysics, 'freezing'> = {},
): Substance =>
  substanceOf(
    {
      freezing: {
        kind: 'solution',
        solutes: Object.entries(solutes).map(([name, kg_kg]) => ({ name, kg_kg })),
      },
      ...rest,
    },
    library.solutes,
  )

export const measured = (
  freezingPoint_C: number,
  water_kg_kg: number,
  bound_kg_kg: number,
  rest: Omit<ProductPhysics, 'freezing'> = {},
): Substance =>
  substanceOf(
    { freezing: { kind: 'measured', freezingPoint_C, water_kg_kg, bound_kg_kg }, ...rest },
    library.solutes,
  )

export const osmolality = (osmolality_osmol_kg: number, water_kg_kg: number): Substance =>
  substanceOf(
    { freezing: { kind: 'osmolality', osmolality_osmol_kg, water_kg_kg, bound_kg_kg: 0 } },
    library.solutes,
  )

export const water = substanceOf({ freezing: { kind: 'water' } }, library.solutes)

/** 9 g of sodium chloride in a litre, 1004.7 g (density of isotonic saline at 20 °C). */
export const saline_kg_kg = 0.009 / 1.0047

/** Products of every kind, for laws that hold for all. */
export const assorted: Readonly<Record<string, Substance>> = {
  water,
  saline: solution({ NaCl: saline_kg_kg }),
  'saline with a eutectic': solution({ NaCl: 0.1 }, { stop: { T_C: -21.2, kind: 'eutectic' } }),
  'sucrose with a glass': solution({ sucrose: 0.3 }, { stop_C: -32 }),
  glycerol: solution({ glycerol: 0.4 }),
  'too strong to freeze': solution({ 'ethylene glycol': 0.6 }),
  plasma: osmolality(0.29, 0.93),
  'tap water': osmolality(0.005, 0.9995),
  beef: measured(-1.7, 0.7, 0.08, { liquidOther_cp_kJ_kgK: 1.9 }),
  'water and solids': osmolality(0, 0.6),
}
