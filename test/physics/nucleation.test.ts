import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { NucleationClass } from '../../config/schema/product.js'
import {
  chanceOf,
  expose,
  hazard_h,
  type Kinetics,
  kineticsOf,
  noExposure,
} from '../../server/physics/nucleation.js'
import { normalQuantile } from '../../server/physics/uncertainty.js'
import { library } from './table.js'

const { priors } = library
const clean = kineticsOf(priors, 'clean-solution', 1e-5, false)
const none = noExposure(clean)

const hold = (k: Kinetics, depth_K: number, dt_s: number): number[] => {
  const e = noExposure(k)
  expose(k, e, depth_K, depth_K, dt_s)
  return e
}

/** ln of the rate that is believed most. */
const middleOf = (k: Kinetics): number => k.lnRate[k.weight.indexOf(Math.max(...k.weight))]!

const one = (b: number): Kinetics => ({ nu: 0.48, b: [b], rate: [1], lnRate: [0], weight: [1] })

describe('exposure', () => {
  test('6 to 8 K in 60 s with b = 12 is 1.2385e12 K¹² s (closed form)', () => {
    const k = one(12)
    const e = [0]
    expose(k, e, 6, 8, 60)
    expect(Math.abs((e[0]! * 1e12) / 1.2385e12 - 1)).toBeLessThan(1e-4)
  })

  test('above the line nothing counts, and a crossing counts from the line on', () => {
    const k = one(12)
    const e = [0]
    expose(k, e, -3, -1, 3600)
    expose(k, e, 0, 0, 3600)
    expect(e).toEqual([0])
    expose(k, e, -2, 8, 100)
    const below = [0]
    expose(k, below, 0, 8, 80)
    expect(e[0]).toBeCloseTo(below[0]!, 12)
  })

  test('law: it is ∫(ΔT/10)^b dt, however the path is cut and whichever way it goes', () => {
    const depth = fc.double({ min: -5, max: 20, noNaN: true })
    const cut = fc.double({ min: 0.01, max: 0.99, noNaN: true })
    fc.assert(
      fc.property(depth, depth, cut, fc.double({ min: 3, max: 40, noNaN: true }), (a, c, f, b) => {
        const k = one(b)
        const whole = [0]
        expose(k, whole, a, c, 600)
        const parts = [0]
        const middle = a + f * (c - a)
        expose(k, parts, a, middle, f * 600)
        expose(k, parts, middle, c, (1 - f) * 600)
        expect(Math.abs(parts[0]! - whole[0]!)).toBeLessThanOrEqual(1e-6 * whole[0]! + 1e-280)
        const back = [0]
        expose(k, back, c, a, 600)
        expect(Math.abs(back[0]! - whole[0]!)).toBeLessThanOrEqual(1e-9 * whole[0]! + 1e-280)
      }),
    )
  })
})

describe('chance', () => {
  test('of one set of parameters is 1 − (1 + κE/ν)^−ν, and of n containers that to the n', () => {
    const k: Kinetics = { nu: 0.48, b: [12], rate: [1e-4], lnRate: [Math.log(1e-4)], weight: [1] }
    const E = 5000
    const survival = (1 + (1e-4 * E) / 0.48) ** -0.48
    const c = chanceOf(k, [0], 0, [{ exposure: [E], weight: 1 }], 10)
    expect(c.mean).toBeCloseTo(1 - survival, 9)
    // A single node is a spike; the spread knows it to a bin of a quarter in ln Λ.
    for (const p of c.one)
      expect(Math.abs(Math.log(-Math.log1p(-p) / -Math.log(survival)))).toBeLessThan(0.25)
    expect(c.any[1]).toBeCloseTo(1 - (1 - c.one[1]) ** 10, 9)
  })

  test('given survival is that of a calmer container: (ν + κE)/(ν + κ(E + e)) to the ν', () => {
    const k: Kinetics = { nu: 0.48, b: [12], rate: [1e-4], lnRate: [Math.log(1e-4)], weight: [1] }
    const c = chanceOf(k, [20_000], 1, [{ exposure: [5000], weight: 1 }], 1)
    expect(c.mean).toBeCloseTo(1 - ((0.48 + 2) / (0.48 + 2.5)) ** 0.48, 9)
  })

  test.each([2, 5, 8, 12])(
    'quantiles at %d K are those of 200,000 even draws of the prior',
    (depth) => {
      const e = hold(clean, depth, 8 * 3600)
      const c = chanceOf(clean, none, 0, [{ exposure: e, weight: 1 }], 120)
      // b over 12 … 36 and log10 κ normal, on a grid far finer than the one in use.
      const draws: number[] = []
      for (let j = 0; j < 200; j++) {
        const b = 12 + ((j + 0.5) * 24) / 200
        const E = 8 * 3600 * (depth / 10) ** b
        for (let i = 0; i < 1000; i++) {
          const κ = 10 ** (1.5 + 1.2 * normalQuantile((i + 0.5) / 1000)) * 1e-5
          draws.push(-Math.expm1(-0.48 * 120 * Math.log1p((κ * E) / 0.48)))
        }
      }
      draws.sort((x, y) => x - y)
      for (const [k, p] of [0.1, 0.5, 0.9].entries()) {
        const exact = draws[Math.floor(p * draws.length)]!
        const decades = Math.abs(Math.log10(c.any[k]! / exact))
        if (exact < 0.99) expect(decades).toBeLessThan(0.04)
        else expect(c.any[k]).toBeGreaterThan(0.98)
      }
    },
  )

  test.each([
    { of: 'clean-solution', depth: 6, past_h: 24, survived: 1 },
    { of: 'food-liquid', depth: 4, past_h: 720, survived: 1 },
    { of: 'unknown', depth: 12, past_h: 720, survived: 1 },
    { of: 'animal-tissue', depth: 12, past_h: 24, survived: 3 },
    { of: 'food-liquid', depth: 6, past_h: 24, survived: 20 },
  ] as const)(
    'after $past_h h at $depth K that $survived survived, quantiles are those of a fine grid ($of)',
    ({ of, depth, past_h, survived }) => {
      const V_m3 = 1e-5
      const k = kineticsOf(priors, of, V_m3, false)
      const e = hold(k, depth, 8 * 3600)
      const past = hold(k, depth, past_h * 3600)
      const c = chanceOf(k, past, survived, [{ exposure: e, weight: 1 }], 1)
      const { log10Kappa, b } = priors.classes[of]
      const draws: { lnΛ: number; w: number }[] = []
      for (let j = 0; j < 100; j++) {
        const power = (depth / 10) ** (b[0] + ((j + 0.5) * (b[1] - b[0])) / 100)
        for (let z = -9; z <= 7; z += 0.02) {
          const κ = 10 ** (log10Kappa.mean + log10Kappa.sd * z) * V_m3
          const κE = κ * power * past_h * 3600
          const Λ = 0.48 * Math.log1p((κ * power * 8 * 3600) / (0.48 + κE))
          const w = Math.exp((-z * z) / 2 - 0.48 * survived * Math.log1p(κE / 0.48))
          draws.push({ lnΛ: Math.log(Λ), w })
        }
      }
      draws.sort((x, y) => x.lnΛ - y.lnΛ)
      const all = draws.reduce((sum, { w }) => sum + w, 0)
      for (const [i, p] of [0.1, 0.5, 0.9].entries()) {
        let sum = 0
        const exact = draws.find(({ w }) => {
          sum += w
          return sum >= p * all
        })!.lnΛ
        const decades = Math.abs(Math.log(-Math.log1p(-c.one[i]!)) - exact) / Math.LN10
        expect(decades).toBeLessThan(0.1)
      }
    },
  )

  test('law: longer, deeper, more containers, never less', () => {
    const depth = fc.double({ min: 0.1, max: 20, noNaN: true })
    const more = fc.double({ min: 1, max: 3, noNaN: true })
    fc.assert(
      fc.property(depth, more, more, fc.integer({ min: 1, max: 5000 }), (d, f, g, n) => {
        const of = (depth_K: number, dt: number, count: number) =>
          chanceOf(clean, none, 0, [{ exposure: hold(clean, depth_K, dt), weight: 1 }], count)
        const base = of(d, 3600, n)
        for (const other of [of(d * f, 3600, n), of(d, 3600 * g, n), of(d, 3600, n + 10)])
          for (const k of [0, 1, 2] as const)
            expect(other.any[k]).toBeGreaterThanOrEqual(base.any[k] * (1 - 1e-9))
        expect(base.any[0]).toBeLessThanOrEqual(base.any[1])
        expect(base.any[1]).toBeLessThanOrEqual(base.any[2])
        for (const p of [...base.one, ...base.any, base.mean]) {
          expect(p).toBeGreaterThanOrEqual(0)
          expect(p).toBeLessThanOrEqual(1)
        }
      }),
    )
  })

  test('nothing ahead is no chance', () => {
    const c = chanceOf(clean, none, 0, [{ exposure: none, weight: 1 }], 120)
    expect(c).toEqual({ one: [0, 0, 0], any: [0, 0, 0], mean: 0 })
  })

  test('having survived makes the next hour less likely', () => {
    const e = hold(clean, 8, 3600)
    const before = chanceOf(clean, none, 0, [{ exposure: e, weight: 1 }], 120)
    const after = chanceOf(clean, hold(clean, 8, 72 * 3600), 120, [{ exposure: e, weight: 1 }], 120)
    for (const k of [0, 1, 2] as const) expect(after.any[k]).toBeLessThanOrEqual(before.any[k])
    expect(after.mean).toBeLessThan(before.mean / 3)
  })

  test('several ways ahead lie between the best and the worst of them', () => {
    const ways = [4, 6, 8].map((d) => ({ exposure: hold(clean, d, 3600), weight: 1 / 3 }))
    const all = chanceOf(clean, none, 0, ways, 1)
    const each = ways.map((w) => chanceOf(clean, none, 0, [w], 1))
    expect(all.mean).toBeCloseTo(each.reduce((sum, c) => sum + c.mean, 0) / 3, 12)
    expect(all.one[2]).toBeLessThanOrEqual(each[2]!.one[2])
    expect(all.one[0]).toBeGreaterThanOrEqual(each[0]!.one[0] * (1 - 1e-9))
  })
})

describe('priors', () => {
  test.each(NucleationClass.options)(
    '%s: an interval of decades at 5 K, and no more than surely',
    (of) => {
      const k = kineticsOf(priors, of, 1e-3, false)
      const { one } = chanceOf(k, noExposure(k), 0, [{ exposure: hold(k, 5, 3600), weight: 1 }], 1)
      expect(one[0]).toBeGreaterThan(0)
      expect(one[2]).toBeLessThanOrEqual(1)
      const decades = Math.log10(Math.log1p(-Math.min(one[2], 1 - 1e-12)) / Math.log1p(-one[0]))
      expect(decades).toBeGreaterThan(2)
    },
  )

  test('up to 100 mL the rate goes with the volume, beyond with less and less certainly', () => {
    const median = (V: number) => middleOf(kineticsOf(priors, 'unknown', V, false))
    const spread = (V: number) => {
      const { lnRate } = kineticsOf(priors, 'unknown', V, false)
      return lnRate.at(-1)! - lnRate[0]!
    }
    expect(median(1e-5) - median(1e-6)).toBeCloseTo(Math.LN10, 9)
    expect(median(1) - median(1e-4)).toBeCloseTo(4 * Math.LN10 * 0.835, 9)
    expect(spread(1)).toBeGreaterThan(spread(1e-4))
  })

  test('what was frozen before nucleates more readily', () => {
    const fresh = hazard_h(clean, none, 0, 6)
    const again = hazard_h(kineticsOf(priors, 'clean-solution', 1e-5, true), none, 0, 6)
    for (const k of [0, 1, 2] as const)
      expect(again.interval[k] / fresh.interval[k]).toBeCloseTo(10, 1)
  })

  test('96 wells of ultrapure water, 30 µL, 1 K/min: no well is given 5 % to freeze by −10 °C', () => {
    // A public 384-well plate (MIT licence): the first of 96 froze at −14.6, the median at −23.3 °C
    const k = kineticsOf(priors, 'clean-solution', 30e-9, false)
    const e = noExposure(k)
    expose(k, e, 0, 10, 600)
    const { one, mean } = chanceOf(k, noExposure(k), 0, [{ exposure: e, weight: 1 }], 1)
    expect(one[2]).toBeLessThan(0.05)
    expect(mean).toBeLessThan(0.05)
  })
})

describe('hazard', () => {
  test('is the chance of a short time, to 2 %', () => {
    for (const depth of [3, 6, 9]) {
      const { mean, interval } = hazard_h(clean, none, 0, depth)
      const e = hold(clean, depth, 1e-3)
      const c = chanceOf(clean, none, 0, [{ exposure: e, weight: 1 }], 1)
      expect(Math.abs(c.mean / (mean * (1e-3 / 3600)) - 1)).toBeLessThan(0.02)
      expect(Math.abs(c.one[1] / (interval[1] * (1e-3 / 3600)) - 1)).toBeLessThan(0.02)
    }
  })

  test.each([0, -1, Number.NaN])('at a depth of %d K there is none', (depth) => {
    expect(hazard_h(clean, none, 0, depth)).toEqual({ interval: [0, 0, 0], mean: 0 })
  })
})
