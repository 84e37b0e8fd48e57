import { describe, expect, test } from 'vitest'
import { pureMelting_C } from '../../server/physics/constants.js'
import {
  equilibriumOsmolality_osmol_kg as osmolality,
  osmolalityAt,
  osmolalitySlope,
  equilibriumTemperature_C as temperature,
  waterActivity,
} from '../../server/physics/equilibrium.js'
import reference from '../reference/water.json' with { type: 'json' }

const iapws = 'G12-15 and R10-06(2009) by python3-iapws 1.5.2, reference/water.py'

describe(`the liquid beside ice (${iapws})`, () => {
  test.each(reference.below.filter((row) => row.t_C < 0))('$t_C °C', (row) => {
    expect(Math.abs(osmolality(row.t_C) / row.osmolality_osmol_kg - 1)).toBeLessThan(2e-3)
    expect(waterActivity(row.osmolality_osmol_kg)).toBeCloseTo(row.waterActivity, 9)
  })
})

test.each([
  {
    t_C: -1.858,
    osmol_kg: 1,
    within: 2e-3,
    source: 'osmometers: 1.858 K kg/osmol [common practice]',
  },
  // −ln(0.904583)/M_w. This ice line is 3 % off IAPWS here, hence the width.
  {
    t_C: -10,
    osmol_kg: 5.5665,
    within: 4e-2,
    source: 'Koop et al. 2000, Nature 406, 611 [from memory]',
  },
  { t_C: -40, osmol_kg: 21.37977, within: 2.1e-3, source: 'G12-15 2 K beyond its range' },
])('ice at $t_C °C leaves $osmol_kg osmol/kg ($source)', ({ t_C, osmol_kg, within }) => {
  expect(Math.abs(osmolality(t_C) / osmol_kg - 1)).toBeLessThan(within)
})

test('the cryoscopic constant of water comes out, K_f = 1.8606 K kg/mol', () => {
  expect(1 / osmolalitySlope(pureMelting_C)).toBeCloseTo(1.8606, 1)
  expect((pureMelting_C - temperature(0.1)) / 0.1).toBeCloseTo(1.862, 2)
})

test('at and above the melting point there is no ice to be in equilibrium with', () => {
  expect(osmolality(pureMelting_C)).toBe(0)
  expect(osmolality(20)).toBe(0)
  expect(temperature(0)).toBe(pureMelting_C)
})

test('law: temperature and osmolality are each other’s inverse to 1e-10, and the slope is theirs', () => {
  for (let t = -60; t < 0; t += 0.37) {
    expect(Math.abs(temperature(osmolalityAt(t)) - t)).toBeLessThan(1e-10)
    const d = 1e-5
    expect((osmolalityAt(t - d) - osmolalityAt(t + d)) / (2 * d)).toBeCloseTo(osmolalitySlope(t), 6)
  }
})

test.each([-40.1, 61, Number.NaN])('it refuses %d °C', (t_C) => {
  expect(() => osmolality(t_C)).toThrow(expect.objectContaining({ field: 't_C', value: t_C }))
})
