import { describe, expect, test } from 'vitest'
import {
  iceCp_kJ_kgK,
  iceDensity_kg_m3,
  iceEnthalpy_kJ_kg,
  iceEntropy_kJ_kgK,
  liquidCp_kJ_kgK,
  liquidDensity_kg_m3,
  liquidWaterEnthalpy_kJ_kg,
  liquidWaterEntropy_kJ_kgK,
} from '../../server/physics/water.js'
import reference from '../reference/water.json' with { type: 'json' }

const iapws = 'python3-iapws 1.5.2, reference/water.py'

describe(`water and ice against G12-15, R10-06(2009) and IAPWS-95 (${iapws})`, () => {
  test.each(reference.below)('liquid and ice at $t_C °C', (row) => {
    expect(Math.abs(liquidCp_kJ_kgK(row.t_C) / row.liquidCp_kJ_kgK - 1)).toBeLessThan(3.5e-3)
    expect(Math.abs(liquidWaterEnthalpy_kJ_kg(row.t_C) - row.liquidEnthalpy_kJ_kg)).toBeLessThan(
      0.075,
    )
    expect(Math.abs(liquidDensity_kg_m3(row.t_C) / row.liquidDensity_kg_m3 - 1)).toBeLessThan(
      7.8e-4,
    )
    expect(Math.abs(iceCp_kJ_kgK(row.t_C) / row.iceCp_kJ_kgK - 1)).toBeLessThan(1.6e-4)
    expect(Math.abs(iceDensity_kg_m3(row.t_C) / row.iceDensity_kg_m3 - 1)).toBeLessThan(1.6e-5)
  })

  test.each(reference.above)('warm liquid at $t_C °C', (row) => {
    const within = row.t_C > 30 ? 1.6e-2 : 3.5e-3
    expect(Math.abs(liquidCp_kJ_kgK(row.t_C) / row.liquidCp_kJ_kgK - 1)).toBeLessThan(within)
    const h = liquidWaterEnthalpy_kJ_kg(row.t_C) - liquidWaterEnthalpy_kJ_kg(0.01)
    expect(Math.abs(h - row.liquidEnthalpyFrom273_16_kJ_kg)).toBeLessThan(row.t_C > 30 ? 1 : 0.075)
  })

  test.each(reference.ice)('cold ice at $t_C °C', (row) => {
    const within = row.t_C < -80 ? 0.09 : 1.6e-4
    expect(Math.abs(iceCp_kJ_kgK(row.t_C) / row.iceCp_kJ_kgK - 1)).toBeLessThan(within)
    if (row.t_C < -80) return
    expect(Math.abs(iceDensity_kg_m3(row.t_C) / row.iceDensity_kg_m3 - 1)).toBeLessThan(1.6e-5)
  })
})

test('the published checks of the releases are met within the error of the fits', () => {
  // G12-15 table 5, 235.15 K and 273.15 K; R10-06(2009) table 6
  expect(Math.abs(liquidCp_kJ_kgK(-38) / 5.997563 - 1)).toBeLessThan(3.5e-3)
  expect(Math.abs(liquidDensity_kg_m3(-38) / 968.09999 - 1)).toBeLessThan(7.8e-4)
  expect(Math.abs(iceCp_kJ_kgK(0.002519) / 2.09671391024 - 1)).toBeLessThan(1.6e-4)
  expect(Math.abs(iceDensity_kg_m3(0.002519) / 916.721463419 - 1)).toBeLessThan(1.6e-5)
})

test('law: enthalpy and entropy are the integrals of the heat capacity', () => {
  const d = 1e-3
  for (let t = -39; t <= 30; t += 1.7) {
    const slope = (liquidWaterEnthalpy_kJ_kg(t + d) - liquidWaterEnthalpy_kJ_kg(t - d)) / (2 * d)
    expect(slope).toBeCloseTo(liquidCp_kJ_kgK(t), 7)
    const ds = (liquidWaterEntropy_kJ_kgK(t + d) - liquidWaterEntropy_kJ_kgK(t - d)) / (2 * d)
    expect(ds * (t + 273.15)).toBeCloseTo(liquidCp_kJ_kgK(t), 5)
  }
  for (let t = -190; t < 0; t += 7.3) {
    const slope = (iceEnthalpy_kJ_kg(t + d) - iceEnthalpy_kJ_kg(t - d)) / (2 * d)
    expect(slope).toBeCloseTo(iceCp_kJ_kgK(t), 7)
    const ds = (iceEntropy_kJ_kgK(t + d) - iceEntropy_kJ_kgK(t - d)) / (2 * d)
    expect(ds * (t + 273.15)).toBeCloseTo(iceCp_kJ_kgK(t), 6)
  }
})

test.each([-40.01, 60.01, Number.NaN, Number.POSITIVE_INFINITY])(
  'liquid water refuses %d °C',
  (t_C) => {
    for (const of of [liquidCp_kJ_kgK, liquidWaterEnthalpy_kJ_kg, liquidWaterEntropy_kJ_kgK])
      expect(() => of(t_C)).toThrow(expect.objectContaining({ code: 'out-of-range', value: t_C }))
  },
)

test.each([-200.1, 0.02, Number.NaN])('ice refuses %d °C', (t_C) => {
  for (const of of [iceCp_kJ_kgK, iceEnthalpy_kJ_kg, iceEntropy_kJ_kgK, iceDensity_kg_m3])
    expect(() => of(t_C)).toThrow(expect.objectContaining({ code: 'out-of-range', value: t_C }))
})
