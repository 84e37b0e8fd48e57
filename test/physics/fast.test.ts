import fc from 'fast-check'
import { expect, test } from 'vitest'
import { equilibriumFrom, liquidTemperature_C } from '../../server/physics/branches.js'
import { apparentCp_kJ_kgK, hEquilibrium, hLiquid } from '../../server/physics/curves.js'
import {
  fastHazard_h,
  fastIce_kg_kg,
  fastLiquid_C,
  fastLiquidCp,
  fastOnIce_C,
  fastOnIceCp,
  hazardTableOf,
  tableOf,
} from '../../server/physics/fast.js'
import { hazard_h, kineticsOf, noExposure } from '../../server/physics/nucleation.js'
import { assorted, library, solution } from './table.js'

const products = {
  ...assorted,
  'all but pure': solution({ NaCl: 1e-7 }),
  'rain water': solution({ NaCl: 3e-5 }),
}
const tables = Object.entries(products).flatMap(([name, s]) =>
  [0, 0.9].map((wall) => ({ name, s, wall, table: tableOf(s, wall) })),
)
const any = fc.constantFrom(...tables)
const share = fc.double({ min: 0, max: 1, noNaN: true })

test('law: the tables are within their stated error of the exact curves', () => {
  fc.assert(
    fc.property(any, share, ({ s, wall, table }, f) => {
      const low = hEquilibrium(s, -195) + wall * -195
      const high = hLiquid(s, 59) + wall * 59
      const h = low + f * (high - low)
      const exact = equilibriumFrom(s, wall, h)
      const pure = s.osmolality_osmol_kg < 1e-3
      expect(Math.abs(fastOnIce_C(table, h) - exact.T_C)).toBeLessThan(pure ? 5e-3 : 5e-4)
      expect(Math.abs(fastIce_kg_kg(table, h) - exact.ice_kg_kg)).toBeLessThan(pure ? 5e-5 : 5e-6)
      expect(Math.abs(fastLiquid_C(table, h) - liquidTemperature_C(s, wall, h))).toBeLessThan(1e-5)
    }),
    { numRuns: 3000 },
  )
})

test('law: the apparent heat capacity of a table is that of the curve', () => {
  fc.assert(
    fc.property(any, fc.double({ min: -39.9, max: 50, noNaN: true }), ({ s, wall, table }, t) => {
      const corners = [s.freezingPoint_C, s.stop?.T_C ?? -40, s.extrapolatedBelow_C ?? -40]
      fc.pre(corners.every((c) => Math.abs(t - c) > 1e-3))
      const h = hEquilibrium(s, t) + wall * t
      const c = apparentCp_kJ_kgK(s, t) + wall
      const within = s.osmolality_osmol_kg < 1e-3 ? 5e-2 : 5e-3
      expect(Math.abs(fastOnIceCp(table, h) / c - 1)).toBeLessThan(within)
    }),
    { numRuns: 2000 },
  )
})

test('law: a warmer body has more heat, in the tables as in nature', () => {
  fc.assert(
    fc.property(any, share, share, ({ table }, a, b) => {
      const [h0, h1] = [-700 + 1000 * Math.min(a, b), -700 + 1000 * Math.max(a, b)]
      expect(fastLiquid_C(table, h1)).toBeGreaterThanOrEqual(fastLiquid_C(table, h0) - 1e-12)
      expect(fastOnIce_C(table, h1)).toBeGreaterThanOrEqual(fastOnIce_C(table, h0) - 1e-12)
      expect(fastIce_kg_kg(table, h1)).toBeLessThanOrEqual(fastIce_kg_kg(table, h0) + 1e-9)
      expect(fastLiquidCp(table, h0)).toBeGreaterThan(0)
      expect(fastOnIceCp(table, h0)).toBeGreaterThan(0)
    }),
    { numRuns: 2000 },
  )
})

test('pure water has a plateau in the table too', () => {
  const { table } = tables.find(({ name, wall }) => name === 'water' && wall === 0)!
  const h = table.hFreezing_kJ_kg - 150
  expect(fastOnIce_C(table, h)).toBe(0.0025193)
  expect(fastOnIceCp(table, h)).toBe(1e6)
  expect(fastIce_kg_kg(table, h)).toBeCloseTo(150 / 333.406, 5)
})

test('tables stay small: some hundred cells a branch', () => {
  for (const { table } of tables) {
    expect(table.onIce.h.length).toBeLessThan(1200)
    expect(table.liquid.h.length).toBeLessThan(600)
  }
})

test('law: the hazard by table is within 2 % of the exact one', () => {
  const k = kineticsOf(library.priors, 'clean-solution', 1e-5, false)
  const table = hazardTableOf(k, noExposure(k), 0)
  fc.assert(
    fc.property(fc.double({ min: 2, max: 30, noNaN: true }), (depth) => {
      const { interval, mean } = hazard_h(k, noExposure(k), 0, depth)
      for (const [j, exact] of [...interval, mean].entries())
        expect(Math.abs(fastHazard_h(table, j as 0 | 1 | 2 | 3, depth) / exact - 1)).toBeLessThan(
          0.02,
        )
    }),
  )
  expect(fastHazard_h(table, 3, 0)).toBe(0)
  expect(fastHazard_h(table, 3, -4)).toBe(0)
})
