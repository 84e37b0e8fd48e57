import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { equilibriumFrom } from '../../server/physics/branches.js'
import { lumpedTime_h, solidifying } from '../../server/physics/freezingTime.js'
import { jump } from '../../server/physics/jump.js'
import { assorted, saline_kg_kg, solution, water } from './table.js'

const vial = { UA_W_K: 0.02, fill_kg: 0.01 }

test.each([
  { t_C: -1, h: 1.81 },
  { t_C: -2, h: 3.26 },
  { t_C: -5, h: 4.5 },
  { t_C: -9, h: 5.86 },
])('10 mL of saline that turned at −8 in air of −10 °C is at $t_C °C after $h h', ({ t_C, h }) => {
  // A step-by-step solution of the same body by a second program: 10 g of glass, UA 0.02 W/K
  const s = solution({ NaCl: saline_kg_kg }, { liquidOther_cp_kJ_kgK: 1.3 })
  const { end_C, firstIce_kg_kg } = jump(s, 0.8, -8)
  const from = { T_C: end_C, ice_kg_kg: firstIce_kg_kg }
  const time_h = lumpedTime_h(s, 0.8, from, { T_C: t_C, ice_kg_kg: 1 }, -10, vial)
  expect(Math.abs(time_h / h - 1)).toBeLessThan(4e-3)
})

test('pure water takes heat over UA ΔT, all at the melting point', () => {
  const j = jump(water, 0, -6)
  const { heatToSolid_kJ_kg, solid_h } = solidifying(water, 0, j, -10, vial)
  expect(heatToSolid_kJ_kg).toBeCloseTo((0.95 - j.firstIce_kg_kg) * 333.406, 2)
  const s = ((heatToSolid_kJ_kg ?? 0) * 1000 * 0.01) / (0.02 * 10.0025193)
  expect(solid_h?.[1]).toBeCloseTo(s / 3600, 9)
})

describe('every product', () => {
  test('law: the quadrature is a body stepped in small steps of heat', () => {
    const any = fc.constantFrom(...Object.keys(assorted))
    fc.assert(
      fc.property(any, fc.double({ min: -25, max: 5, noNaN: true }), (name, from_C) => {
        const s = assorted[name]!
        const air_C = -38
        const j = jump(s, 0.5, from_C)
        const { heatToSolid_kJ_kg, solid_h } = solidifying(s, 0.5, j, air_C, vial)
        fc.pre(heatToSolid_kJ_kg !== null)
        const steps = 4000
        let sum = 0
        for (let k = 0; k < steps; k++) {
          const h = j.h_kJ_kg - ((heatToSolid_kJ_kg ?? 0) * (k + 0.5)) / steps
          sum += 1 / (equilibriumFrom(s, 0.5, h).T_C - air_C)
        }
        const hours = ((sum * (heatToSolid_kJ_kg ?? 0)) / steps) * (10 / 0.02 / 3600)
        expect(Math.abs((solid_h?.[1] ?? 0) - hours)).toBeLessThan(1e-5 + 2e-5 * hours)
      }),
      { numRuns: 60 },
    )
  })

  test('low, middle and high are UA × 1.6, 1 and 0.6', () => {
    const j = jump(assorted.saline!, 0, -6)
    const { solid_h } = solidifying(assorted.saline!, 0, j, -12, vial)
    expect(solid_h?.[0]).toBeCloseTo((solid_h?.[1] ?? 0) / 1.6, 12)
    expect(solid_h?.[2]).toBeCloseTo((solid_h?.[1] ?? 0) / 0.6, 12)
  })
})

describe('what is solid', () => {
  const s = assorted.saline!
  const solidAt = (air_C: number | null, from_C = -6) =>
    solidifying(s, 0, jump(s, 0, from_C), air_C, vial)

  test('95 % of the ice that the air can make', () => {
    const { heatToSolid_kJ_kg, iceAtAir_kg_kg } = solidAt(-10)
    const end = equilibriumFrom(s, 0, jump(s, 0, -6).h_kJ_kg - (heatToSolid_kJ_kg ?? 0))
    expect(end.ice_kg_kg).toBeCloseTo(0.95 * (iceAtAir_kg_kg ?? 0), 8)
  })

  test('air colder than the end of freezing makes no more of it', () => {
    expect(solidAt(-80).heatToSolid_kJ_kg).toBeCloseTo(solidAt(-40).heatToSolid_kJ_kg ?? 0, 9)
    expect(solidAt(-80).iceAtAir_kg_kg).toBe(solidAt(-40).iceAtAir_kg_kg)
  })

  test('without air it is at the end of freezing, and takes no one knows how long', () => {
    const none = solidAt(null)
    expect(none.heatToSolid_kJ_kg).toBeCloseTo(solidAt(-40).heatToSolid_kJ_kg ?? 0, 9)
    expect(none).toMatchObject({ iceAtAir_kg_kg: null, solid_h: null, settlesAt_kg_kg: null })
  })

  test('without a coupling the time is not known', () => {
    const j = jump(s, 0, -6)
    const r = solidifying(s, 0, j, -10, null)
    expect(r.solid_h).toBeNull()
    expect(r.heatToSolid_kJ_kg).not.toBeNull()
  })

  test('air that takes no heat makes nothing solid: it settles at the ice of the air', () => {
    expect(solidAt(2)).toMatchObject({
      heatToSolid_kJ_kg: null,
      solid_h: null,
      settlesAt_kg_kg: 0,
    })
    const warm = solidAt(-0.54)
    expect(warm.heatToSolid_kJ_kg).toBeNull()
    expect(warm.settlesAt_kg_kg).toBeGreaterThan(0)
    expect(warm.settlesAt_kg_kg).toBe(warm.iceAtAir_kg_kg)
  })

  test('and settles there when 95 % of what the air melts has melted', () => {
    const j = jump(s, 0, -6)
    const { settle_h } = solidAt(2)
    // Nearly all at the freezing point: 95 % of the first ice over UA and 2.55 K, and its warming
    const heat_kJ = 0.01 * (0.95 * j.firstIce_kg_kg * 332 + 4.1 * 0.05)
    const hours = (heat_kJ * 1000) / (0.02 * 2.56) / 3600
    expect(Math.abs((settle_h?.[1] ?? 0) / hours - 1)).toBeLessThan(0.02)
    expect(solidAt(2, 1).settle_h).toBeNull()
    expect(solidifying(water, 0, jump(water, 0, -6), 2, vial).settle_h?.[1]).toBeCloseTo(
      (0.95 * jump(water, 0, -6).firstIce_kg_kg * 333.406 * 10) / (0.02 * 1.9974807) / 3600,
      5,
    )
  })

  test('a product above its freezing point cools first', () => {
    const from5 = solidAt(-10, 5)
    const fromTf = solidAt(-10, s.freezingPoint_C)
    expect((from5.heatToSolid_kJ_kg ?? 0) - (fromTf.heatToSolid_kJ_kg ?? 0)).toBeGreaterThan(20)
    expect(from5.solid_h?.[1]).toBeGreaterThan(fromTf.solid_h?.[1] ?? Number.POSITIVE_INFINITY)
  })

  test('at a eutectic the plateau counts too', () => {
    const eutectic = assorted['saline with a eutectic']!
    const glass = { ...eutectic, stop: { T_C: -21.2, kind: 'glass' as const } }
    const j = jump(eutectic, 0, -12)
    const a = solidifying(eutectic, 0, j, -25, vial)
    const b = solidifying(glass, 0, j, -25, vial)
    expect(a.heatToSolid_kJ_kg).toBeGreaterThan((b.heatToSolid_kJ_kg ?? 0) + 50)
    expect(a.solid_h?.[1]).toBeGreaterThan(b.solid_h?.[1] ?? Number.POSITIVE_INFINITY)
  })

  test('what freezes nowhere in a store is never solid', () => {
    const strong = assorted['too strong to freeze']!
    expect(solidifying(strong, 0, jump(strong, 0, -30), -40, vial)).toMatchObject({
      iceAtAir_kg_kg: 0,
      heatToSolid_kJ_kg: null,
    })
  })
})
