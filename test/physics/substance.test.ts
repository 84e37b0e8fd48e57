import { describe, expect, test } from 'vitest'
import type { ProductPhysics } from '../../config/schema/product.js'
import { ice_kg_kg, liquidOsmolality_osmol_kg } from '../../server/physics/curves.js'
import {
  foodOtherCp_kJ_kgK,
  foodPartCp_kJ_kgK,
  foodPartDensity_kg_m3,
} from '../../server/physics/food.js'
import { substanceOf } from '../../server/physics/substance.js'
import { library, measured, osmolality, solution, water } from './table.js'

const of = (product: ProductPhysics) => substanceOf(product, library.solutes)

describe('the five forms say the same of the same product', () => {
  test('an osmolality, the point it freezes at, and both again', () => {
    const a = osmolality(0.287, 0.99)
    const b = measured(a.freezingPoint_C, 0.99, 0)
    expect(b.osmolality_osmol_kg).toBeCloseTo(0.287, 10)
    for (const t of [-0.6, -2, -10, -39]) expect(ice_kg_kg(b, t)).toBeCloseTo(ice_kg_kg(a, t), 10)
  })

  test('a trace of salt is all but water', () => {
    const trace = solution({ NaCl: 1e-9 })
    expect(trace.freezingPoint_C).toBeCloseTo(water.freezingPoint_C, 6)
    expect(ice_kg_kg(trace, -1)).toBeCloseTo(ice_kg_kg(water, -1), 6)
  })

  test('water freezes at its melting point, all of it', () => {
    expect(water.freezingPoint_C).toBe(0.0025193)
    expect(ice_kg_kg(water, 0)).toBe(1)
    expect(ice_kg_kg(water, 0.01)).toBe(0)
  })

  test('plasma at 290 mosmol/kg freezes at −0.5374 °C (python3-iapws)', () => {
    expect(Math.abs(osmolality(0.29, 0.93).freezingPoint_C + 0.5374)).toBeLessThan(1e-3)
  })
})

describe('heat capacity of all that is not water, by default', () => {
  test.each([
    { solutes: { NaCl: 0.009 }, cp: -2.7 },
    { solutes: { sucrose: 0.1 }, cp: 1.4 },
    { solutes: { tris: 0.01 }, cp: 1.4 },
    { solutes: { glycerol: 0.2 }, cp: 2.4 },
    { solutes: { ethanol: 0.05 }, cp: 2.4 },
    { solutes: { NaCl: 0.01, sucrose: 0.03 }, cp: (0.01 * -2.7 + 0.03 * 1.4) / 0.04 },
  ])('$solutes: $cp', ({ solutes, cp }) => {
    expect(solution(solutes).otherCp_kJ_kgK).toBeCloseTo(cp, 12)
  })

  test('measured and osmolality 1.4; what is given stands', () => {
    expect(measured(-0.5, 0.9, 0).otherCp_kJ_kgK).toBe(1.4)
    expect(osmolality(0.3, 0.9).otherCp_kJ_kgK).toBe(1.4)
    expect(measured(-0.5, 0.9, 0, { liquidOther_cp_kJ_kgK: 1.9 }).otherCp_kJ_kgK).toBe(1.9)
  })

  test('a food: the mass mean of its parts at 0 °C (Choi and Okos 1986 [from memory])', () => {
    const beef = of({
      freezing: {
        kind: 'food',
        water_kg_kg: 0.745,
        protein_kg_kg: 0.2,
        fat_kg_kg: 0.04,
        carbohydrate_kg_kg: 0,
        fibre_kg_kg: 0,
        ash_kg_kg: 0.015,
        freezingPoint_C: -1.7,
      },
    })
    expect(beef.otherCp_kJ_kgK).toBeCloseTo(
      (0.2 * 2.0082 + 0.04 * 1.9842 + 0.015 * 1.0926) / 0.255,
      12,
    )
    expect(beef.bound_kg_kg).toBeCloseTo(0.08, 12)
  })
})

describe('parts of foods (Choi and Okos 1986 as ASHRAE prints them [from memory])', () => {
  test('protein at −20, 0, 20 °C and ash’s density', () => {
    expect([-20, 0, 20].map((t) => foodPartCp_kJ_kgK('protein_kg_kg', t).toFixed(4))).toEqual([
      '1.9835',
      '2.0082',
      '2.0319',
    ])
    expect([-20, 0, 20].map((t) => foodPartDensity_kg_m3('ash_kg_kg', t).toFixed(1))).toEqual([
      '2429.4',
      '2423.8',
      '2418.2',
    ])
  })

  test('without parts there is no mean', () => {
    const nothing = {
      protein_kg_kg: 0,
      fat_kg_kg: 0,
      carbohydrate_kg_kg: 0,
      fibre_kg_kg: 0,
      ash_kg_kg: 0,
    }
    expect(foodOtherCp_kJ_kgK(nothing, 0)).toBeNull()
  })
})

describe('the uncertainty of a freezing point', () => {
  test('is what is given, as kelvins or as a share of the depression', () => {
    const form = {
      kind: 'measured',
      freezingPoint_C: -0.53,
      water_kg_kg: 0.99,
      bound_kg_kg: 0,
    } as const
    expect(of({ freezing: { ...form, u_K: 0.05 } }).freezingPoint_u_K).toBe(0.05)
    expect(of({ freezing: { ...form, relU: 0.02 } }).freezingPoint_u_K).toBeCloseTo(0.01064, 4)
  })

  test('has a default of its own for each form, never 0', () => {
    for (const s of [
      measured(-0.5, 0.9, 0),
      osmolality(0.3, 0.9),
      solution({ NaCl: 0.009 }),
      water,
    ])
      expect(s.freezingPoint_u_K).toBeGreaterThan(0)
    expect(measured(-0.5, 0.9, 0).freezingPoint_u_K).toBe(0.02)
  })
})

describe('a stop', () => {
  test('a bare one is a glass: ice and osmolality stay as they were there', () => {
    const s = solution({ sucrose: 0.1 }, { stop_C: -32 })
    expect(s.stop).toEqual({ T_C: -32, kind: 'glass' })
    expect(ice_kg_kg(s, -39)).toBe(ice_kg_kg(s, -32))
    expect(ice_kg_kg(s, -90)).toBe(ice_kg_kg(s, -32))
    expect(liquidOsmolality_osmol_kg(s, -39)).toBe(liquidOsmolality_osmol_kg(s, -32))
  })

  test('at a eutectic what is left freezes', () => {
    const s = solution({ NaCl: 0.1 }, { stop: { T_C: -21.2, kind: 'eutectic' } })
    expect(ice_kg_kg(s, -21.2)).toBeLessThan(0.65)
    expect(ice_kg_kg(s, -21.201)).toBe(0.9)
  })

  test.each([
    { stop_C: -0.1, field: 'stop_C' },
    { stop: { T_C: -0.1, kind: 'glass' as const }, field: 'stop.T_C' },
  ])('above the freezing point it is refused: $field', ({ field, ...stop }) => {
    expect(() => measured(-0.5, 0.9, 0, stop)).toThrow(
      expect.objectContaining({ code: 'stop-above-freezing', field }),
    )
  })

  test('given twice it is refused', () => {
    expect(() =>
      measured(-0.5, 0.9, 0, { stop_C: -20, stop: { T_C: -20, kind: 'glass' } }),
    ).toThrow(expect.objectContaining({ code: 'given-twice' }))
  })
})

describe('what cannot be', () => {
  test('more bound water than water', () => {
    expect(() => measured(-0.5, 0.3, 0.3)).toThrow(
      expect.objectContaining({ code: 'all-bound', field: 'freezing.bound_kg_kg' }),
    )
  })

  test('no water', () => {
    expect(() => measured(-0.5, 0, 0)).toThrow(expect.objectContaining({ code: 'no-water' }))
  })

  test('solutes that are all 0', () => {
    expect(() => solution({ NaCl: 0 })).toThrow(expect.objectContaining({ code: 'no-solute' }))
  })

  test('a product that gives off heat when warmed', () => {
    expect(() => measured(-0.5, 0.5, 0, { liquidOther_cp_kJ_kgK: -6 })).toThrow(
      expect.objectContaining({ code: 'no-heat-capacity', field: 'liquidOther_cp_kJ_kgK' }),
    )
  })
})

test('what freezes below −40 °C is no error: it has no ice in any store, and is flagged', () => {
  const antifreeze = solution({ 'ethylene glycol': 0.6 })
  expect(antifreeze.freezingPoint_C).toBeLessThan(-45)
  expect(antifreeze.extrapolated).toBe(true)
  expect(ice_kg_kg(antifreeze, -80)).toBe(0)
})
