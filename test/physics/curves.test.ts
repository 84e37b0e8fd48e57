import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import {
  equilibriumFrom,
  liquidTemperature_C,
  plateauAtFreezing_kg_kg,
  plateauAtStop_kg_kg,
  whereIce,
} from '../../server/physics/branches.js'
import {
  apparentCp_kJ_kgK,
  endOfFreezing_C,
  equilibriumEnthalpy_kJ_kg,
  hEquilibrium,
  hLiquid,
  ice_kg_kg,
  iceAt,
  liquidCp,
  liquidEnthalpy_kJ_kg,
  liquidOsmolality_osmol_kg,
  mostIce_kg_kg,
} from '../../server/physics/curves.js'
import { assorted, measured } from './table.js'

const all = Object.entries(assorted)
const walls = fc.constantFrom(0, 0.3, 0.9)
const any = fc.constantFrom(...Object.values(assorted))
const liquid_C = fc.double({ min: -40, max: 60, noNaN: true })
const frozen_C = fc.double({ min: -200, max: 60, noNaN: true })

test('enthalpy counts from the liquid product at 0 °C', () => {
  for (const [, s] of all) {
    expect(liquidEnthalpy_kJ_kg(s, 0)).toBeCloseTo(0, 9)
    if (s.freezingPoint_C < 0) expect(equilibriumEnthalpy_kJ_kg(s, 0)).toBeCloseTo(0, 9)
  }
})

describe('beef against ASHRAE and Chen (ASHRAE Refrigeration, thermal properties of foods)', () => {
  const beef = measured(-1.7, 0.5821, 0.4 * 0.1748, { liquidOther_cp_kJ_kgK: 1.75 })
  // Chen 1985: x = (w0 − x_b)(1 − t_f/t). Agreement of the two forms: 3e-4.
  test.each([
    { t_C: -2, chen: 0.0768 },
    { t_C: -5, chen: 0.338 },
    { t_C: -10, chen: 0.4251 },
    { t_C: -20, chen: 0.4686 },
    { t_C: -30, chen: 0.4832 },
  ])('ice at $t_C °C: $chen', ({ t_C, chen }) => {
    expect(Math.abs(ice_kg_kg(beef, t_C) - chen)).toBeLessThan(3e-4)
  })

  // Chen 1985a, relative to −40 °C; within 0.7 kJ/kg
  test.each([
    { t_C: -20, chen: 48.79 },
    { t_C: -10, chen: 84.08 },
    { t_C: -5, chen: 123.51 },
    { t_C: -1.7, chen: 243.13 },
    { t_C: 10, chen: 280.37 },
  ])('enthalpy at $t_C °C above that at −40: $chen', ({ t_C, chen }) => {
    const h = equilibriumEnthalpy_kJ_kg(beef, t_C) - equilibriumEnthalpy_kJ_kg(beef, -40)
    expect(Math.abs(h - chen)).toBeLessThan(0.7)
  })

  test('150 kg of carcass from 10 to −20 °C give off 34 737 kJ by Chen, within 0.5 %', () => {
    const q = equilibriumEnthalpy_kJ_kg(beef, 10) - equilibriumEnthalpy_kJ_kg(beef, -20)
    expect(Math.abs((150 * q) / 34_737 - 1)).toBeLessThan(5e-3)
  })

  test('Tchigeov’s ice, 1.105 w0/(1 + 0.7138/ln(t_f − t + 1)), is within a tenth at −20 °C', () => {
    // ASHRAE prints 0.52 for it [from memory]; it counts the bound water as freezing
    const tchigeov = (1.105 * 0.5821) / (1 + 0.7138 / Math.log(-1.7 + 20 + 1))
    expect(Math.abs(ice_kg_kg(beef, -20) / tchigeov - 1)).toBeLessThan(0.1)
  })
})

describe.each(all)('%s', (_, s) => {
  test('more ice, less enthalpy and a stronger liquid as it gets colder', () => {
    let [x, h, π] = [0, Number.POSITIVE_INFINITY, 0]
    for (let t = 60; t >= -200; t -= 0.5) {
      const now = { x: ice_kg_kg(s, t), h: equilibriumEnthalpy_kJ_kg(s, t) }
      expect(now.x).toBeGreaterThanOrEqual(x)
      expect(now.x).toBeLessThanOrEqual(s.water_kg_kg - s.bound_kg_kg)
      expect(now.h).toBeLessThan(h)
      expect(liquidOsmolality_osmol_kg(s, t)).toBeGreaterThanOrEqual(π)
      ;[x, h, π] = [now.x, now.h, liquidOsmolality_osmol_kg(s, t)]
    }
  })

  test('heat capacities are the slopes of the enthalpies', () => {
    const corners = [s.freezingPoint_C, endOfFreezing_C(s), -40, s.extrapolatedBelow_C ?? -40]
    for (let t = -39.7; t < 59; t += 0.83) {
      const d = Math.min(1e-4, 1e-4 * Math.abs(t))
      if (corners.some((c) => Math.abs(t - c) < 0.01)) continue
      const slope = (hEquilibrium(s, t + d) - hEquilibrium(s, t - d)) / (2 * d)
      expect(Math.abs(slope / apparentCp_kJ_kgK(s, t) - 1)).toBeLessThan(1e-5)
      expect((hLiquid(s, t + d) - hLiquid(s, t - d)) / (2 * d)).toBeCloseTo(liquidCp(s, t), 5)
    }
  })

  test('both branches are one above the freezing point, and part without a step', () => {
    const f = Math.max(s.freezingPoint_C, -40)
    expect(equilibriumEnthalpy_kJ_kg(s, f)).toBeCloseTo(liquidEnthalpy_kJ_kg(s, f), 9)
    expect(equilibriumEnthalpy_kJ_kg(s, 20)).toBe(liquidEnthalpy_kJ_kg(s, 20))
  })
})

test('law: temperature and enthalpy are each other’s inverse on the liquid branch to 1e-9', () => {
  fc.assert(
    fc.property(any, walls, liquid_C, (s, wall, t) => {
      const h = hLiquid(s, t) + wall * t
      expect(Math.abs(liquidTemperature_C(s, wall, h) - t)).toBeLessThan(1e-9)
    }),
  )
})

test('law: temperature and enthalpy are each other’s inverse beside ice to 1e-9', () => {
  fc.assert(
    fc.property(any, walls, frozen_C, (s, wall, t) => {
      fc.pre(t >= -40 || s.freezingPoint_C > -40)
      const found = equilibriumFrom(s, wall, hEquilibrium(s, t) + wall * t)
      expect(Math.abs(found.T_C - t)).toBeLessThan(1e-9)
    }),
    { numRuns: 1000 },
  )
})

test('law: whatever the enthalpy, temperature and ice have exactly that enthalpy', () => {
  const h = fc.double({ min: -500, max: 200, noNaN: true })
  fc.assert(
    fc.property(any, walls, h, (s, wall, h_kJ_kg) => {
      const { T_C, ice_kg_kg: x } = equilibriumFrom(s, wall, h_kJ_kg)
      fc.pre(T_C > -40 && T_C < 60)
      const plateaus = plateauAtFreezing_kg_kg(s) + plateauAtStop_kg_kg(s)
      if (plateaus === 0) expect(hEquilibrium(s, T_C) + wall * T_C).toBeCloseTo(h_kJ_kg, 7)
      expect(x).toBeGreaterThanOrEqual(0)
      expect(x).toBeLessThanOrEqual(mostIce_kg_kg(s) + 1e-12)
    }),
    { numRuns: 1000 },
  )
})

test('pure water freezes on a plateau: half of its heat, half of its ice', () => {
  const { water } = assorted as { water: (typeof assorted)[string] }
  const h = hLiquid(water, water.freezingPoint_C)
  const half = equilibriumFrom(water, 0, h - 333.4 / 2)
  expect(half.T_C).toBe(water.freezingPoint_C)
  expect(half.ice_kg_kg).toBeCloseTo(0.5, 3)
})

test('a eutectic freezes on a plateau of its own', () => {
  const s = assorted['saline with a eutectic']!
  const h = hEquilibrium(s, -21.2)
  const size = plateauAtStop_kg_kg(s)
  expect(size).toBeCloseTo(0.9 - iceAt(s, -21.2), 12)
  const within = equilibriumFrom(s, 0, h - 10)
  expect(within.T_C).toBe(-21.2)
  expect(within.ice_kg_kg).toBeGreaterThan(iceAt(s, -21.2))
  expect(equilibriumFrom(s, 0, h - 200).T_C).toBeLessThan(-21.2)
})

test('where a given ice is found there is that ice', () => {
  for (const [, s] of all) {
    const most = mostIce_kg_kg(s)
    if (most === 0) continue
    for (const share of [0.001, 0.1, 0.5, 0.95, 0.999]) {
      const place = whereIce(s, 0.5, share * most)
      const found = equilibriumFrom(s, 0.5, place.h_kJ_kg)
      expect(found.ice_kg_kg).toBeCloseTo(share * most, 8)
      expect(found.T_C).toBeCloseTo(place.T_C, 7)
    }
  }
})

test.each([-40.1, 60.1, Number.NaN])('there is no liquid at %d °C', (t_C) => {
  expect(() => liquidEnthalpy_kJ_kg(assorted.saline!, t_C)).toThrow(
    expect.objectContaining({ code: 'out-of-range', value: t_C }),
  )
})

test.each([-200.1, 60.1, Number.NaN])('the curves do not reach %d °C', (t_C) => {
  for (const of of [
    equilibriumEnthalpy_kJ_kg,
    ice_kg_kg,
    apparentCp_kJ_kgK,
    liquidOsmolality_osmol_kg,
  ])
    expect(() => of(assorted.saline!, t_C)).toThrow(
      expect.objectContaining({ code: 'out-of-range', value: t_C }),
    )
})
