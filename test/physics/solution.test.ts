import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { ice_kg_kg } from '../../server/physics/curves.js'
import {
  fitEnd_osmol_kg,
  liquidWater_kg_kg,
  nearestSolutes,
  soluteOf,
  solutionOf,
} from '../../server/physics/solution.js'
import { substanceOf } from '../../server/physics/substance.js'
import { library, osmolality, saline_kg_kg, solution } from './table.js'

const crc = 'CRC Handbook 102nd ed., Concentrative Properties (Wolf 1966)'

describe(`freezing points of solutions (${crc})`, () => {
  // Within 0.02 K below 2 K of depression, 0.045 K for the solutes that the table says so of;
  // beyond, within the greatest error of the fit.
  test.each([
    { solute: 'NaCl', percent: 1, K: 0.59 },
    { solute: 'NaCl', percent: 10, K: 6.56 },
    { solute: 'NaCl', percent: 20, K: 16.46 },
    { solute: 'KCl', percent: 5, K: 2.32 },
    { solute: 'KCl', percent: 10, K: 4.81 },
    { solute: 'CaCl₂', percent: 10, K: 5.86 },
    { solute: 'sucrose', percent: 10, K: 0.63 },
    { solute: 'sucrose', percent: 42, K: 4.93 },
    { solute: 'glucose', percent: 10, K: 1.17 },
    { solute: 'glucose', percent: 30, K: 4.79 },
    { solute: 'fructose', percent: 20, K: 2.64 },
    { solute: 'maltose', percent: 20, K: 1.43 },
    { solute: 'mannitol', percent: 15, K: 1.84 },
    { solute: 'glycerol', percent: 20, K: 5.46 },
    { solute: 'glycerol', percent: 40, K: 15.5 },
    { solute: 'ethylene glycol', percent: 20, K: 7.93 },
    { solute: 'ethylene glycol', percent: 40, K: 23.84 },
    { solute: 'ethanol', percent: 5, K: 2.09 },
    { solute: 'ethanol', percent: 20, K: 10.92 },
    { solute: 'urea', percent: 10, K: 3.26 },
    { solute: 'sodium bicarbonate', percent: 6, K: 2.26 },
    { solute: 'Na citrate·2H₂O', percent: 20, K: 4.39 },
  ])('$percent % $solute freezes $K K below water', ({ solute, percent, K }) => {
    const row = library.solutes.solutes.find(
      (s) => s.name === soluteOf(library.solutes, solute, 'name').name,
    )!
    const within = K < 2 ? Math.max(0.02, row.errorBelow2K_K) : Math.max(0.02, row.maxError_K)
    // 0.005 K: the handbook is rounded to 0.01
    expect(Math.abs(solution({ [solute]: percent / 100 }).freezingPoint_C + K)).toBeLessThan(
      within + 0.005,
    )
  })
})

test.each([
  {
    solutes: { 'propylene glycol': 0.2 },
    C: -7.17,
    within: 0.17,
    source: 'CoolProp 8.0 INCOMP::MPG',
  },
  {
    solutes: { 'propylene glycol': 0.4 },
    C: -20.57,
    within: 0.17,
    source: 'CoolProp 8.0 INCOMP::MPG',
  },
  // Half the difference of the sources is the honest width here.
  {
    solutes: { 'propylene glycol': 0.4 },
    C: -21.1,
    within: 0.7,
    source: 'ASHRAE Fundamentals 31 [from memory]',
  },
  { solutes: { NaCl: saline_kg_kg }, C: -0.53, within: 0.01, source: 'isotonic saline, Pitzer' },
  {
    solutes: { NaCl: 6.731 / 1006.731 },
    C: -0.4,
    within: 0.01,
    source: 'cryoscope standard, GB 5413.38',
  },
])('$solutes freezes at $C °C ($source)', ({ solutes, C, within }) => {
  expect(Math.abs(solution(solutes).freezingPoint_C - C)).toBeLessThan(within)
})

describe('the water-demand form itself, by a second program of the same equations', () => {
  test.each([
    { solutes: { NaCl: 0.035 }, C: -2.105 },
    { solutes: { NaCl: 0.1 }, C: -6.556 },
    { solutes: { NaCl: 0.2 }, C: -16.498 },
    { solutes: { NaCl: 0.23 }, C: -20.591 },
    { solutes: { sucrose: 0.1 }, C: -0.621 },
    { solutes: { sucrose: 0.4 }, C: -4.455 },
    { solutes: { glycerol: 0.4 }, C: -15.478 },
    { solutes: { sucrose: 0.08, NaCl: 0.003 }, C: -0.68 },
  ])('$solutes: $C °C', ({ solutes, C }) => {
    expect(Math.abs(solution(solutes).freezingPoint_C - C)).toBeLessThan(6e-4)
  })

  test.each([
    { of: 'saline', s: solution({ NaCl: saline_kg_kg }), ice: [0.8944, 0.9449, 0.969] },
    { of: 'NaCl 10 %', s: solution({ NaCl: 0.1 }), ice: [0, 0.3225, 0.6191] },
    { of: 'plasma', s: osmolality(0.29, 0.93), ice: [0.8924, 0.9463, 0.9732] },
  ])('$of: shares of its water frozen at −5, −10, −20 °C', ({ s, ice }) => {
    const shares = [-5, -10, -20].map((t) => ice_kg_kg(s, t) / s.water_kg_kg)
    for (const [k, share] of shares.entries()) expect(Math.abs(share - ice[k]!)).toBeLessThan(1e-4)
  })
})

describe('sucrose in strong solutions (Goff and Hartel, Ice Cream, 2013, table 6.1)', () => {
  // The larger of 0.03 K and 6 %: the table is old, rounded to 0.01 K, and around 15 g per 100 g it
  // reads 0.05 K colder than the CRC Handbook.
  test.each([
    { g_per_100g: 15, C: -0.9 },
    { g_per_100g: 33, C: -2.03 },
    { g_per_100g: 51, C: -3.2 },
    { g_per_100g: 69, C: -4.54 },
  ])('$g_per_100g g per 100 g of water freezes at $C °C', ({ g_per_100g, C }) => {
    const kg_kg = g_per_100g / (100 + g_per_100g)
    expect(Math.abs(solution({ sucrose: kg_kg }).freezingPoint_C - C)).toBeLessThan(
      Math.max(0.03, -0.06 * C),
    )
  })

  test('beyond the fit it is flagged, and within an eighth of the table all the same', () => {
    const s = solution({ sucrose: 153 / 253 })
    expect(s.extrapolated).toBe(true)
    expect(Math.abs(s.freezingPoint_C / -11.63 - 1)).toBeLessThan(0.125)
  })
})

test('an ice-cream mix as its sugars freezes where the book reckons it', () => {
  // Goff and Hartel 2013, table 6.2: 60 % water, 36.97 g of sucrose equivalents per 100 g of water
  const mix = solution({ sucrose: 0.3697 / 1.3697 })
  const ofWater = (t: number) => ice_kg_kg(mix, t) / mix.water_kg_kg
  // Its calculation adds the salts of milk, −0.5 K; without them ours is warmer by that much.
  expect(Math.abs(mix.freezingPoint_C + 2.74 - 0.5)).toBeLessThan(0.3)
  expect(ofWater(-5.87 + 0.6)).toBeGreaterThan(0.4)
  expect(ofWater(-5.87 + 0.6)).toBeLessThan(0.6)
})

const names = library.solutes.solutes.map((s) => s.name)

test.each(names)(
  '%s: its demand for water falls over the whole of its fit and stays above 0',
  (name) => {
    const s = soluteOf(library.solutes, name, 'name')
    const end = fitEnd_osmol_kg(s)
    const { pieces } = solutionOf(
      [{ name, kg_kg: s.molarMass_kg_mol / 10 }],
      library.solutes,
      'solutes',
    )
    let before = Number.POSITIVE_INFINITY
    for (let π = 0.01; π < 60; π *= 1.02) {
      const w = liquidWater_kg_kg(pieces, π)
      expect(w).toBeGreaterThan(0)
      expect(w).toBeLessThan(before)
      before = w
    }
    expect(liquidWater_kg_kg(pieces, end * (1 + 1e-12))).toBeCloseTo(
      liquidWater_kg_kg(pieces, end),
      10,
    )
    // The end of the fit is the strongest solution that was fitted.
    const m = s.fittedTo_kg_kg / (1 - s.fittedTo_kg_kg) / s.molarMass_kg_mol
    expect(10 * liquidWater_kg_kg(pieces, end) * m).toBeCloseTo(1, 9)
  },
)

test('law: for every pair, 1–60 %, ice lies between 0 and the water and grows as it gets colder', () => {
  const name = fc.constantFrom(...names)
  const share = fc.double({ min: 0, max: 1, noNaN: true })
  const all = fc.double({ min: 0.01, max: 0.6, noNaN: true })
  fc.assert(
    fc.property(name, name, share, all, (a, b, f, w) => {
      const s = substanceOf(
        {
          freezing: {
            kind: 'solution',
            solutes: [
              { name: a, kg_kg: w * f },
              { name: b, kg_kg: w * (1 - f) },
            ],
          },
        },
        library.solutes,
      )
      let before = 0
      for (let t = 0.5; t >= -40; t -= 0.25) {
        const x = ice_kg_kg(s, t)
        expect(x).toBeGreaterThanOrEqual(before)
        expect(x).toBeLessThanOrEqual(s.water_kg_kg - s.bound_kg_kg)
        if (t < s.freezingPoint_C && t > -40) expect(x).toBeGreaterThan(before)
        before = x
      }
    }),
    { numRuns: 400 },
  )
})

test('beyond the fit of a solute the uncertainty of its freezing point doubles', () => {
  const relU = 0.03
  const of = (kg_kg: number) => {
    const s = substanceOf(
      { freezing: { kind: 'solution', solutes: [{ name: 'sucrose', kg_kg }], relU } },
      library.solutes,
    )
    return s.freezingPoint_u_K / -s.freezingPoint_C
  }
  expect(of(0.419)).toBeLessThan(0.032)
  expect(of(0.425) / of(0.419)).toBeGreaterThan(1.9)
})

describe('names', () => {
  test.each(['NaCl', 'nacl', ' Sodium  Chloride ', 'sodium-chloride', 'SODIUM CHLORIDE'])(
    '%s is sodium chloride',
    (name) => {
      expect(soluteOf(library.solutes, name, 'name').name).toBe('sodium chloride')
    },
  )

  test('every name and alias of the table names one solute, shared formulas apart', () => {
    for (const s of library.solutes.solutes) {
      expect(soluteOf(library.solutes, s.name, 'name')).toBe(s)
      for (const alias of s.aliases) {
        const known = library.solutes.solutes.filter((o) => o.aliases.includes(alias))
        if (known.length === 1) expect(soluteOf(library.solutes, alias, 'name')).toBe(s)
      }
    }
  })

  test('an unknown solute is refused with the nearest known ones', () => {
    const refused = () => solution({ 'sodium clorid': 0.01 })
    expect(refused).toThrow(
      expect.objectContaining({
        code: 'unknown-solute',
        field: 'freezing.solutes[0].name',
        value: 'sodium clorid',
        remedy: expect.stringContaining('"sodium chloride"'),
      }),
    )
    expect(nearestSolutes(library.solutes, 'propylen glycole')[0]).toBe('propylene glycol')
  })

  test('a formula that several sugars share is refused with their names', () => {
    expect(() => solution({ C6H12O6: 0.05 })).toThrow(
      expect.objectContaining({
        code: 'ambiguous-solute',
        remedy: expect.stringContaining('"fructose"'),
      }),
    )
  })
})
