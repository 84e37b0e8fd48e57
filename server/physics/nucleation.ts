import type { NucleationClass } from '../../config/schema/product.js'
import type { Interval } from './freezingTime.js'
import { addToSpread, beginSpread, quantileOfSpread } from './spread.js'

/** config/library/priors.json. */
export type Priors = {
  /** Shape of the gamma by which the rate varies between containers of one batch. */
  readonly nu: number
  readonly volumeExponent: { readonly above_m3: number; readonly range: readonly [number, number] }
  readonly previouslyFrozen: { readonly decades: number }
  readonly classes: Readonly<
    Record<
      NucleationClass,
      {
        readonly log10Kappa: { readonly mean: number; readonly sd: number }
        readonly b: readonly [number, number]
      }
    >
  >
}

/**
 * What is believed of the nucleation of one container, as a grid over rate and exponent.
 *
 *     λ = V κ (ΔT/10 K)^b      per second; κ log-normal, b uniform
 */
export type Kinetics = {
  readonly nu: number
  /** Exponents, evenly over their range, equal weights. */
  readonly b: readonly number[]
  /** Vκ, its logarithm, and normal weights that add up to 1. */
  readonly rate: readonly number[]
  readonly lnRate: readonly number[]
  readonly weight: readonly number[]
}

/** Nodes over b. */
const exponents = 9
/**
 * Nodes over ln κ, in standard deviations. Where many have survived long, what is left to believe
 * lies far down the prior, so the grid goes further that way: cut at −3.25, twenty that survived a
 * day at 12 K kept a chance 45 times too high.
 */
const lowest = -6.5
const highest = 3.25
const between = 0.25

/**
 * The prior of a product for one container of it, ready for the hot path.
 *
 * Up to 100 mL the hazard goes with the volume. Beyond, V^s with s uniform over its range; its
 * spread is folded into that of ln κ (a sum of a wide normal and a narrow uniform is all but
 * normal).
 *
 * @param volume_m3         of one container's fill, above 0
 * @param previouslyFrozen  raises the hazard: what a first freeze leaves behind nucleates
 */
export function kineticsOf(
  priors: Priors,
  nucleation: NucleationClass,
  volume_m3: number,
  previouslyFrozen: boolean,
): Kinetics {
  const prior = priors.classes[nucleation]
  const { above_m3, range } = priors.volumeExponent
  const beyond = Math.max(0, Math.log(volume_m3 / above_m3))
  const [s0, s1] = range
  const lnVolume = Math.log(Math.min(volume_m3, above_m3)) + (beyond * (s0 + s1)) / 2
  const decades = prior.log10Kappa.mean + (previouslyFrozen ? priors.previouslyFrozen.decades : 0)
  const mean = decades * Math.LN10 + lnVolume
  const sd = Math.hypot(prior.log10Kappa.sd * Math.LN10, (beyond * (s1 - s0)) / Math.sqrt(12))
  const z = Array.from(
    { length: Math.round((highest - lowest) / between) + 1 },
    (_, i) => lowest + i * between,
  )
  const density = z.map((x) => Math.exp((-x * x) / 2))
  const all = density.reduce((sum, p) => sum + p, 0)
  const [b0, b1] = prior.b
  const lnRate = z.map((x) => mean + sd * x)
  return {
    nu: priors.nu,
    b: Array.from({ length: exponents }, (_, j) => b0 + ((j + 0.5) * (b1 - b0)) / exponents),
    rate: lnRate.map(Math.exp),
    lnRate,
    weight: density.map((p) => p / all),
  }
}

/** Exposure of each exponent, E_b = ∫(ΔT/10 K)^b dt, s: one number per exponent. */
export type Exposure = readonly number[]

/** No exposure yet. */
export function noExposure(k: Kinetics): number[] {
  return k.b.map(() => 0)
}

/** ln(1e-300): a power so small that it counts as none. */
const lnNothing = -690

/**
 * Exposure over a stretch on which the depth goes in a straight line, added in place.
 *
 *     ∫ (d/10)^b dt = Δt (d₂^{b+1} − d₁^{b+1}) / [(b+1)(d₂ − d₁) 10^b]
 *
 * @param into     changed
 * @param from_K   supercooling at the start; above the line it is negative and does not count
 * @param to_K     supercooling at the end
 * @param dt_s     ≥ 0
 */
export function expose(
  k: Kinetics,
  into: number[],
  from_K: number,
  to_K: number,
  dt_s: number,
): void {
  const deep = Math.max(from_K, to_K)
  if (!(deep > 0) || !(dt_s > 0)) return
  const flat = Math.min(from_K, to_K)
  // Only the part below the line counts.
  const part = flat >= 0 ? dt_s : (dt_s * deep) / (deep - flat)
  const ratio = Math.max(0, flat) / deep
  const lnDeep = Math.log(deep / 10)
  // d₁ = r d₂: (1 − r^{b+1})/(1 − r) is the mean of the power; near 1 its limit.
  const level = 1 - ratio < 1e-7
  const lnRatio = ratio > 0 ? Math.log(ratio) : lnNothing
  for (let j = 0; j < into.length; j++) {
    const b = k.b[j]!
    const power = b * lnDeep
    if (power < lnNothing) continue
    const shape = level ? 1 : -Math.expm1((b + 1) * lnRatio) / ((1 - ratio) * (b + 1))
    into[j] = into[j]! + part * Math.exp(power) * shape
  }
}

/** One way the future may go, and how likely it is. */
export type Ahead = { readonly exposure: Exposure; readonly weight: number }

/** Chance of turning; low, middle and high are the 10, 50 and 90 % quantiles. */
export type Chance = {
  /** Of one container. */
  readonly one: Interval
  /** Of at least one of all. */
  readonly any: Interval
  /** Of one container, averaged over what is believed: the rate of switching for a filter. */
  readonly mean: number
}

/** Low, middle and high of every interval. */
const shares = [0.1, 0.5, 0.9]

/** Half of the stretch of ln κ that a node stands for. */
const halfStep = (k: Kinetics): number => ((k.lnRate[1] ?? k.lnRate[0]!) - k.lnRate[0]!) / 2

/** Below this ln, log1p(x) is x to a part in a million. */
const lnSmall = -14

/** Weight that a survived past leaves to a rate: (1 + κE/ν)^(−νn). */
const survival = (nu: number, rate: number, past: number, count: number): number =>
  past > 0 ? Math.exp(-nu * count * Math.log1p((rate * past) / nu)) : 1

/**
 * Chance that ice forms over what lies ahead, e, given that all containers are liquid now after E.
 *
 *     Λ = ν ln[(ν + κ(E + e))/(ν + κE)]     one = 1 − e^−Λ     any = 1 − e^−nΛ
 *
 * Λ averages over the gamma frailty of containers: one that has survived is a calmer one. Quantiles
 * are over κ, b and the ways ahead.
 *
 * @param past      exposure that every container is known to have survived; `noExposure` where
 *                  nobody could see
 * @param survived  how many containers are known to have survived it
 * @param ahead     ways the exposure may go, with weights above 0 that need not add up to 1
 * @param count     containers
 * @returns         within 0.1 decade in Λ of a fine grid's; where twenty and more have survived what
 *                  the prior gives no chance at all, up to a decade too high
 */
export function chanceOf(
  k: Kinetics,
  past: Exposure,
  survived: number,
  ahead: readonly Ahead[],
  count: number,
): Chance {
  beginSpread()
  const lnNu = Math.log(k.nu)
  const half = halfStep(k)
  let all = 0
  let mean = 0
  for (let j = 0; j < k.b.length; j++) {
    const E = past[j] ?? 0
    for (const way of ahead) {
      const lnAhead = Math.log(way.exposure[j] ?? 0)
      for (let i = 0; i < k.rate.length; i++) {
        const rate = k.rate[i]!
        const w = k.weight[i]! * way.weight * survival(k.nu, rate, E, survived)
        all += w
        // ln of κe/(ν + κE), then of Λ = ν ln[(ν + κ(E + e))/(ν + κE)]
        const x = k.lnRate[i]! + lnAhead - (E > 0 ? Math.log(k.nu + rate * E) : lnNu)
        // The more a container has survived, the less its rate tells of what is to come.
        const reach = E > 0 ? (half * k.nu) / (k.nu + rate * E) : half
        if (x > lnSmall) {
          const κe = Math.exp(x)
          const Λ = k.nu * Math.log1p(κe)
          mean -= w * Math.expm1(-Λ)
          // A node stands for its stretch of ln κ; Λ bends, so its stretch of ln Λ is shorter.
          addToSpread(Math.log(Λ), (reach * κe * k.nu) / ((1 + κe) * Λ), w)
        } else {
          mean += w * Math.exp(lnNu + x)
          addToSpread(lnNu + x, reach, w)
        }
      }
    }
  }
  const events = shares.map(quantileOfSpread)
  const chance = (n: number): Interval => [
    -Math.expm1(-n * events[0]!),
    -Math.expm1(-n * events[1]!),
    -Math.expm1(-n * events[2]!),
  ]
  return { one: chance(1), any: chance(count), mean: all > 0 ? mean / all : 0 }
}

/**
 * Hazard of one container now, per hour: low, middle, high and mean over what is believed.
 *
 * @param depth_K  supercooling; 0 or less: none
 */
export function hazard_h(
  k: Kinetics,
  past: Exposure,
  survived: number,
  depth_K: number,
): { readonly interval: Interval; readonly mean: number } {
  if (!(depth_K > 0)) return { interval: [0, 0, 0], mean: 0 }
  const lnDepth = Math.log(depth_K / 10)
  const half = halfStep(k)
  beginSpread()
  let all = 0
  let mean = 0
  for (let j = 0; j < k.b.length; j++) {
    const E = past[j] ?? 0
    const lnPower = k.b[j]! * lnDepth
    for (let i = 0; i < k.rate.length; i++) {
      const rate = k.rate[i]!
      const w = k.weight[i]! * survival(k.nu, rate, E, survived)
      // The gamma's mean, given that the container is still liquid.
      const ln = k.lnRate[i]! + lnPower - Math.log1p((rate * E) / k.nu)
      all += w
      mean += w * Math.exp(ln)
      addToSpread(ln, half / (1 + (rate * E) / k.nu), w)
    }
  }
  const [low, middle, high] = shares.map((p) => 3600 * quantileOfSpread(p))
  return { interval: [low!, middle!, high!], mean: all > 0 ? (3600 * mean) / all : 0 }
}

/**
 * Chance that one container is still liquid after an exposure, over all that is believed of κ and b.
 *
 *     S = Σ_b Σ_κ w (1 + κE_b/ν)^(−ν)
 *
 * @returns 0…1; the mean alone, for the hot path
 */
export function stillLiquid(k: Kinetics, exposure: Exposure): number {
  let alive = 0
  for (let j = 0; j < k.b.length; j++) {
    const E = exposure[j] ?? 0
    for (let i = 0; i < k.rate.length; i++) {
      const x = (k.rate[i]! * E) / k.nu
      // Most of the grid is untouched.
      alive += k.weight[i]! * (x < 1e-12 ? 1 : Math.exp(-k.nu * Math.log1p(x)))
    }
  }
  return alive / k.b.length
}
