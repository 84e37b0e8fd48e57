import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { R_J_molK, waterMolarMass_kg_mol, zeroCelsius_K } from '../../server/physics/constants.js'
import {
  drivingForce_J_kg,
  entropyProduction_J_kgK,
  fusionAt,
  fusionSlope,
  latentHeat_kJ_kg,
  threeStepPath,
} from '../../server/physics/fusion.js'
import reference from '../reference/water.json' with { type: 'json' }
import { saline_kg_kg, solution } from './table.js'

const iapws = 'G12-15 and R10-06(2009) by python3-iapws 1.5.2, reference/water.py'

describe(`freezing at depth (${iapws})`, () => {
  test.each(reference.below)('$t_C °C', (row) => {
    expect(Math.abs(latentHeat_kJ_kg(row.t_C) / row.fusion_kJ_kg - 1)).toBeLessThan(1e-4)
    expect(Math.abs(drivingForce_J_kg(row.t_C, 0) + row.gibbs_J_kg)).toBeLessThan(
      1 + 2e-3 * row.gibbs_J_kg,
    )
    const path = threeStepPath(row.t_C)
    expect(Math.abs(path.dH_kJ_kg + row.fusion_kJ_kg)).toBeLessThan(0.1)
    expect(Math.abs(path.dS_kJ_kgK + row.fusionEntropy_kJ_kgK)).toBeLessThan(4e-4)
    expect(Math.abs(path.dG_kJ_kg * 1000 + row.gibbs_J_kg)).toBeLessThan(1 + 1e-3 * row.gibbs_J_kg)
  })
})

test('the three steps add up, and make entropy', () => {
  // G12-15 and R10-06(2009), integrated: at −20 °C 85.7308 − 333.4265 − 40.4683 kJ/kg
  const path = threeStepPath(-20)
  expect(Math.abs(path.heat_kJ_kg - 85.7308)).toBeLessThan(0.08)
  expect(path.freeze_kJ_kg).toBe(-333.4265)
  expect(Math.abs(path.cool_kJ_kg + 40.4683)).toBeLessThan(0.01)
  expect(path.heat_kJ_kg + path.freeze_kJ_kg + path.cool_kJ_kg).toBeCloseTo(path.dH_kJ_kg, 9)
  expect(Math.abs(path.entropyProduction_kJ_kgK / 0.089895 - 1)).toBeLessThan(2e-3)
})

test('the driving force is RT ln of the vapour pressures of liquid and ice', () => {
  // Murphy and Koop 2005, Q. J. R. Meteorol. Soc. 131, 1539, eq. 7 and 10
  const murphyKoop = [
    { t_C: -1, J_mol: 22.123 },
    { t_C: -5, J_mol: 108.339 },
    { t_C: -10, J_mol: 212.904 },
    { t_C: -20, J_mol: 410.778 },
    { t_C: -38, J_mol: 720.576 },
  ]
  for (const { t_C, J_mol } of murphyKoop) {
    // 0.2 J/mol: theirs is at vapour pressure, this at one atmosphere
    const ours = -drivingForce_J_kg(t_C, 0) * waterMolarMass_kg_mol
    expect(Math.abs(ours - J_mol)).toBeLessThan(0.2 + 5e-3 * J_mol)
  }
})

test('isotonic saline at −8 °C is driven with 8.89 kJ per kg of water (Pitzer’s NaCl)', () => {
  const s = solution({ NaCl: saline_kg_kg })
  expect(Math.abs(drivingForce_J_kg(-8, s.osmolality_osmol_kg) + 8890)).toBeLessThan(20)
})

test('the slope of the heat of fusion is its slope', () => {
  for (let t = -39.9; t < 0; t += 1.3)
    expect((fusionAt(t + 1e-4) - fusionAt(t - 1e-4)) / 2e-4).toBeCloseTo(fusionSlope(t), 6)
})

test('law: a supercooled liquid makes entropy by freezing, any other would destroy it', () => {
  fc.assert(
    fc.property(
      fc.double({ min: -40, max: 10, noNaN: true }),
      fc.double({ min: 0, max: 21, noNaN: true }),
      (t_C, π) => {
        const ΔG = drivingForce_J_kg(t_C, π)
        const made = entropyProduction_J_kgK(t_C, π)
        expect(made * (t_C + zeroCelsius_K)).toBeCloseTo(-ΔG, 6)
        // π in osmol/kg of water against what ice at t leaves
        const gap = -ΔG / (R_J_molK * (t_C + zeroCelsius_K))
        expect(Math.sign(made)).toBe(Math.sign(gap))
      },
    ),
  )
})

test.each([-40.1, 0.02, Number.NaN])('the heat of fusion refuses %d °C', (t_C) => {
  expect(() => latentHeat_kJ_kg(t_C)).toThrow(expect.objectContaining({ code: 'out-of-range' }))
})
