import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { ContainerPhysics } from '../../config/schema/product.js'
import {
  area_m2,
  couplingOf,
  fillVolume_m3,
  wallShare_kJ_kgK,
} from '../../server/physics/container.js'
import { lag_s, lagged_C } from '../../server/physics/probe.js'
import { airRise_K, freezingPower_W, neighbourRise_K } from '../../server/physics/surroundings.js'
import {
  belowProbability,
  combined_u,
  normalCdf,
  normalQuantile,
  rectangular_u,
} from '../../server/physics/uncertainty.js'

const container = (given: object) => ContainerPhysics.parse({ fill_kg: 0.01, ...given })

describe('containers', () => {
  test('areas of the four shapes', () => {
    expect(area_m2(container({ shape: 'cylinder', radius_m: 0.011, height_m: 0.03 }))).toBeCloseTo(
      2.8337e-3,
      6,
    )
    expect(area_m2(container({ shape: 'sphere', radius_m: 0.1 }))).toBeCloseTo(0.125664, 6)
    expect(
      area_m2(container({ shape: 'box', length_m: 0.1, width_m: 0.2, height_m: 0.3 })),
    ).toBeCloseTo(0.22, 12)
    expect(area_m2(container({ fill_kg: 5, shape: 'slab', thickness_m: 0.05 }))).toBeCloseTo(
      0.2,
      12,
    )
  })

  test('a coupling is what is given, or a film times the area', () => {
    expect(couplingOf(container({ UA_W_K: 0.02 }))).toEqual({ UA_W_K: 0.02, relU: 0.3 })
    const film = { shape: 'sphere', radius_m: 0.1, h_W_m2K: 8, UA_relU: 0.4 }
    expect(couplingOf(container(film))).toEqual({ UA_W_K: 8 * 4 * Math.PI * 0.01, relU: 0.4 })
    expect(couplingOf(container({}))).toBeNull()
  })

  test.each([
    { given: { shape: 'cylinder', radius_m: 0.01 }, field: 'height_m' },
    { given: { shape: 'slab' }, field: 'thickness_m' },
    { given: { shape: 'box', length_m: 1, width_m: 1 }, field: 'height_m' },
    { given: {}, field: 'shape' },
  ])('a film without $field is refused', ({ given, field }) => {
    expect(() => couplingOf(container({ ...given, h_W_m2K: 8 }))).toThrow(
      expect.objectContaining({ code: 'missing', field }),
    )
  })

  test('its wall and volume go by the fill', () => {
    expect(wallShare_kJ_kgK(container({ wall_kJ_K: 0.009 }))).toBeCloseTo(0.9, 12)
    expect(fillVolume_m3(container({}))).toBe(1e-5)
  })
})

describe('surroundings', () => {
  const room = { airVolume_m3: 18, fixtures_kJ_K: 400, wall_UA_W_K: 25, cooling_W_K: 60 }

  test('a 10 mL vial gives its air 0.19 W while it freezes', () => {
    expect(freezingPower_W(0.02, -0.59, -10)).toBeCloseTo(0.188, 3)
    expect(freezingPower_W(0.02, -0.59, 2)).toBe(0)
  })

  test('120 vials warm a room by hundredths of a kelvin, to a factor of two', () => {
    const rise = airRise_K(room, 120, 0.02, -0.59, -10, null)!
    // Steady: P over what walls, cooling and the vials themselves take per kelvin
    expect(rise[1]).toBeCloseTo((2.4 * 9.41) / (85 + 2.4), 9)
    expect(rise[0]).toBeCloseTo(rise[1] / 2, 12)
    expect(rise[2]).toBeCloseTo(rise[1] * 2, 12)
  })

  test('a short freeze warms less: fixtures take time', () => {
    const brief = airRise_K(room, 120, 0.02, -0.59, -10, 0.1)!
    expect(brief[1]).toBeLessThan(airRise_K(room, 120, 0.02, -0.59, -10, null)![1])
  })

  test('not known of the room is not known of its air', () => {
    expect(airRise_K({ airVolume_m3: 1 }, 1, 0.02, -1, -10, 1)).toBeNull()
  })

  test('law: nothing is warmed beyond what warms it', () => {
    const n = fc.integer({ min: 1, max: 100_000 })
    const t = fc.double({ min: -40, max: 5, noNaN: true })
    fc.assert(
      fc.property(n, t, t, (count, end_C, air_C) => {
        const most = Math.max(0, end_C - air_C)
        for (const r of [
          ...airRise_K(room, count, 0.02, end_C, air_C, 3)!,
          ...neighbourRise_K(end_C, air_C),
        ]) {
          expect(r).toBeGreaterThanOrEqual(0)
          expect(r).toBeLessThanOrEqual(most + 1e-12)
        }
      }),
    )
  })
})

describe('a probe', () => {
  test.each([
    { dt_s: 60, shows_C: 3.5726 },
    { dt_s: 600, shows_C: -4.4818 },
    { dt_s: 1382, shows_C: -8.501 },
    { dt_s: 1800, shows_C: -9.2532 },
  ])('of 600 s, put from 5 into −10 °C, shows $shows_C after $dt_s s', ({ dt_s, shows_C }) => {
    expect(Math.abs(lagged_C(5, -10, -10, 600, dt_s) - shows_C)).toBeLessThan(1e-3)
  })

  test('T90 is 2.3026 time constants', () => {
    expect(lag_s(120)).toBeCloseTo(52.115, 2)
    expect(lagged_C(0, 1, 1, lag_s(120), 120)).toBeCloseTo(0.9, 12)
  })

  test('on a ramp it lags by time constant times rate', () => {
    expect(lagged_C(0, 0, -100, 60, 6000) - -100).toBeCloseTo(60 * (100 / 6000), 9)
  })

  test('without lag or time it shows what it must', () => {
    expect(lagged_C(3, 1, 2, 0, 10)).toBe(2)
    expect(lagged_C(3, 1, 2, 60, 0)).toBe(3)
  })

  test('law: two half steps are one whole step', () => {
    const t = fc.double({ min: -40, max: 40, noNaN: true })
    fc.assert(
      fc.property(t, t, t, fc.double({ min: 1, max: 5000, noNaN: true }), (s, a, b, dt) => {
        const middle = (a + b) / 2
        const half = lagged_C(lagged_C(s, a, middle, 120, dt / 2), middle, b, 120, dt / 2)
        expect(half).toBeCloseTo(lagged_C(s, a, b, 120, dt), 8)
      }),
    )
  })
})

describe('uncertainty', () => {
  test.each([
    { T_C: -0.3, line_C: -0.53, u_K: 0.15, p: 0.0626 },
    { T_C: -0.8, line_C: -0.53, u_K: 0.15, p: 0.96407 },
    { T_C: 2, line_C: 2, u_K: 0.25, p: 0.5 },
    { T_C: 2.3, line_C: 2, u_K: 0.25, p: 1 - 0.88493 },
  ])(
    'JCGM 106: $T_C °C with u $u_K is below $line_C with probability $p',
    ({ T_C, line_C, u_K, p }) => {
      expect(Math.abs(belowProbability(T_C, line_C, u_K) - p)).toBeLessThan(6e-6)
    },
  )

  test('without uncertainty it is sure', () => {
    expect([-1, -0.5, 0].map((t) => belowProbability(t, -0.5, 0))).toEqual([1, 0.5, 0])
  })

  test('a budget of calibration, drift, position, product and line: 0.2508 K', () => {
    expect(combined_u([0.1, 0.05, 0.2, 0.1, 0.02])).toBeCloseTo(0.2508, 4)
    expect(rectangular_u(0.3)).toBeCloseTo(0.17321, 5)
  })

  test.each([
    { z: 0, p: 0.5 },
    { z: 1, p: 0.8413447460685429 },
    { z: -3, p: 1.3498980316301e-3 },
    { z: -6, p: 9.865876450377e-10 },
  ])('P(Z ≤ $z) = $p (tables)', ({ z, p }) => {
    expect(Math.abs(normalCdf(z) / p - 1)).toBeLessThan(2e-7)
  })

  test('law: the quantile undoes the distribution', () => {
    fc.assert(
      fc.property(fc.double({ min: -6, max: 6, noNaN: true }), (z) => {
        // Towards 1 a double itself runs out of digits.
        expect(Math.abs(normalQuantile(normalCdf(z)) - z)).toBeLessThan(z < 3 ? 1e-5 : 0.05)
      }),
    )
    expect(normalQuantile(0)).toBe(Number.NEGATIVE_INFINITY)
    expect(normalQuantile(1)).toBe(Number.POSITIVE_INFINITY)
    expect(normalQuantile(0.95)).toBeCloseTo(1.644854, 6)
  })
})
