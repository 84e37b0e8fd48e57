import type { Product } from '../../config/schema/product.js'
import type { Matter } from './matter.js'
import type { Library } from './plan.js'

/**
 * What is believed about the nucleation of a product in its container before any event: a grid over
 * the rate at 10 K and the exponent.
 *
 *     λ = V κ (ΔT/10)^b
 *
 * Within a batch κ differs from container to container as a gamma of shape ν, so that one of them
 * stays liquid through an exposure E with the chance (1 + VκE/ν)^(−ν).
 */
export type Kinetics = {
  /** Vκ, per second, and its prior weight. */
  readonly rates_s: readonly number[]
  readonly weights: readonly number[]
  readonly exponents: readonly number[]
  /** Shape of the gamma by which containers of one batch differ. */
  readonly nu: number
}

/** The literature's word on nucleation, as config/library/priors.json gives it. */
export type Priors = {
  readonly nu: number
  readonly volumeExponent: { readonly above_m3: number; readonly range: readonly [number, number] }
  readonly previouslyFrozen: { readonly decades: number }
  readonly classes: Readonly<
    Record<
      string,
      {
        readonly log10Kappa: { readonly mean: number; readonly sd: number }
        readonly b: readonly [number, number]
      }
    >
  >
}

/** Standard normal quantiles of nine equal slices, by their medians. */
const slices = [-1.5932, -0.9674, -0.5895, -0.2822, 0, 0.2822, 0.5895, 0.9674, 1.5932]
/** Two further points for the tails, which rule the mean of so wide a spread. */
const tails = 2.4
const tailWeight = 0.02
const steps_b = 5

const density_kg_m3 = 1000

/**
 * The prior of a product's nucleation class for one container of it. Up to a volume the rate goes
 * with the volume; beyond, with a power of it that is itself uncertain (rulings.md 4).
 *
 * @param frozenBefore  it has been frozen before: more sites are active
 */
export function kineticsOf(
  product: Product,
  fill_kg: number,
  library: Library,
  frozenBefore: boolean,
): Kinetics {
  const { priors } = library
  const prior = priors.classes[product.nucleation]
  if (prior === undefined) throw new Error(`no prior for ${product.nucleation} in the library`)
  const linearUpTo_m3 = priors.volumeExponent.above_m3
  const V = fill_kg / density_kg_m3
  const over = Math.max(0, Math.log10(V / linearUpTo_m3))
  const [s0, s1] = priors.volumeExponent.range
  const logV = Math.log10(Math.min(V, linearUpTo_m3)) + over * ((s0 + s1) / 2)
  // A uniform exponent over its range adds this much spread, in decades.
  const σV = (over * (s1 - s0)) / Math.sqrt(12)
  const σ = Math.hypot(prior.log10Kappa.sd, σV)
  const at = [-tails, ...slices, tails]
  const weights = at.map((_, i) =>
    i === 0 || i === at.length - 1 ? tailWeight : (1 - 2 * tailWeight) / slices.length,
  )
  const [b0, b1] = prior.b
  const mean = prior.log10Kappa.mean + (frozenBefore ? priors.previouslyFrozen.decades : 0)
  return {
    rates_s: at.map((z) => 10 ** (mean + σ * z + logV)),
    weights,
    exponents: Array.from({ length: steps_b }, (_, i) => b0 + ((i + 0.5) * (b1 - b0)) / steps_b),
    nu: priors.nu,
  }
}

/**
 * Exposure over a stretch on which the depth goes in a straight line, added to what there was:
 *
 *     E_b ← E_b + ∫ (ΔT/10)^b dt
 *
 * by Simpson's rule.
 */
export function exposed(
  m: Matter,
  before: readonly number[],
  from_K: number,
  to_K: number,
  dt_s: number,
): readonly number[] {
  if ((from_K <= 0 && to_K <= 0) || dt_s <= 0) return before
  const middle = (from_K + to_K) / 20
  const [a, c] = [Math.max(0, from_K) / 10, Math.max(0, to_K) / 10]
  return before.map((E, i) => {
    const b = m.kinetics.exponents[i]!
    return E + (dt_s / 6) * (a ** b + 4 * Math.max(0, middle) ** b + c ** b)
  })
}

/** Chance that one container stays liquid through an exposure, over all that is believed. */
export function aliveAfter(m: Matter, exposure: readonly number[]): number {
  const { rates_s, weights, exponents, nu } = m.kinetics
  let alive = 0
  for (let j = 0; j < exponents.length; j++) {
    const E = exposure[j] ?? 0
    for (let i = 0; i < rates_s.length; i++) {
      const x = rates_s[i]! * E
      // Most of the grid is either untouched or long gone.
      alive += weights[i]! * (x < 1e-12 ? 1 : (1 + x / nu) ** -nu)
    }
  }
  return alive / exponents.length
}

/** One exposure ahead, E_b for each exponent, and how likely that path is. */
export type Ahead = { readonly exposure: readonly number[]; readonly weight: number }

/**
 * Chance that at least one of so many containers turns over an exposure: low, middle and high over
 * rate, exponent and path.
 *
 * @param survived  exposure through which they stayed liquid; zeros where nobody could see
 */
export function chanceOver(
  m: Matter,
  survived: readonly number[],
  ahead: readonly Ahead[],
  count: number,
): [number, number, number] {
  const { rates_s, weights, exponents, nu } = m.kinetics
  const points: [number, number][] = []
  let all = 0
  for (const path of ahead) {
    for (let j = 0; j < exponents.length; j++) {
      for (let i = 0; i < rates_s.length; i++) {
        const frail = 1 + (rates_s[i]! * (survived[j] ?? 0)) / nu
        const w = path.weight * weights[i]! * frail ** -nu
        all += w
        // Given that it has stayed liquid so long, a container is likely one of the less ready.
        const more = Math.log1p((rates_s[i]! * path.exposure[j]!) / nu / frail)
        points.push([-Math.expm1(-nu * count * more), w])
      }
    }
  }
  points.sort((a, b) => a[0] - b[0])
  return [quantile(points, 0.1 * all), quantile(points, 0.5 * all), quantile(points, 0.9 * all)]
}

/** Weighted quantile with straight lines between the middles of the weights. */
const quantile = (sorted: readonly (readonly [number, number])[], want: number): number => {
  let before = 0
  let last: readonly [number, number] | null = null
  for (const [value, w] of sorted) {
    const middle = before + w / 2
    if (middle >= want) {
      if (last === null) return value
      const [v0, m0] = last
      return v0 + ((value - v0) * (want - m0)) / Math.max(1e-300, middle - m0)
    }
    last = [value, middle]
    before += w
  }
  return sorted.at(-1)?.[0] ?? 0
}
