import {
  biasOf,
  carry,
  type Drive,
  H,
  leaning,
  sensorOf,
  shareOf,
  touchOnIce,
  Δ,
  Λ,
} from './estimate.js'
import { at, correct, type Gauss, mix, varianceOfSum } from './gauss.js'
import { heatCapacity_kJ_kgK, type Matter, temperature_C } from './matter.js'
import type { Branch } from './state.js'
import { normal } from './trust.js'

/**
 * Two rivals and a few candidates: still liquid, or turned at one of a few moments. Each step moves
 * a little weight from liquid to a fresh candidate with the same enthalpy; readings do the rest
 * (interacting-model filters, Blom & Bar-Shalom 1988).
 */

/** Above this many candidates with ice the two nearest in enthalpy become one. */
const mostCandidates = 4
/** Lighter candidates (logs, against the heaviest) are let go. */
const lightest = -19
/** Nothing is weighed lighter than this while it is kept: a rival must be able to come back. */
const floorLog = -40
/** Degrees of freedom of the likelihood: now and then a reading is simply off (watch.md §4). */
const ν = 5

/** log Γ((ν+1)/2) − log Γ(ν/2) − ½ log(νπ) for ν = 5. */
const studentNorm = Math.log(0.3796067)

/** How far, relatively, the coupling may change when ice forms [common practice]. */
const iceCoupling = 0.08

/** Log density of a reading that is z standard deviations off, with spread √S. */
export const logDensity = (z2: number, S: number): number =>
  studentNorm - 0.5 * Math.log(S) - ((ν + 1) / 2) * Math.log1p(z2 / ν)

export const sumLogs = (logs: readonly number[]): number => {
  const top = Math.max(...logs)
  if (top < -1e200) return top
  return top + Math.log(logs.reduce((sum, w) => sum + Math.exp(w - top), 0))
}

export const normalised = (bank: readonly Branch[]): Branch[] => {
  const all = sumLogs(bank.map((b) => b.w))
  return bank.map((b) => ({ ...b, w: Math.max(floorLog, b.w - all) }))
}

/** Two candidates as one: moments of both, and the times of either that carries weight. */
const merged = (a: Branch, b: Branch, n: number): Branch => {
  const w = sumLogs([a.w, b.w])
  const share = Math.exp(b.w - w)
  const [heavy, light, ofLight] = share > 0.5 ? [b, a, 1 - share] : [a, b, share]
  const g: Gauss = [...heavy.g]
  mix(g, light.g, n, ofLight)
  const both = ofLight > 0.03
  return {
    ...heavy,
    w,
    g,
    from_ms: both ? Math.min(a.from_ms, b.from_ms) : heavy.from_ms,
    to_ms: both ? Math.max(a.to_ms, b.to_ms) : heavy.to_ms,
    from_C: heavy.from_C * (1 - ofLight) + light.from_C * ofLight,
    jump_K: heavy.jump_K * (1 - ofLight) + light.jump_K * ofLight,
  }
}

/** Lets the lightest go, joins what is alike, and keeps the weights at a sum of 1. */
export function thinned(bank: readonly Branch[], n: number): Branch[] {
  const top = Math.max(...bank.map((b) => b.w))
  let kept = bank.filter((b) => b.w > top + lightest)
  for (const kind of ['liquid', 'melted'] as const) {
    const alike = kept.filter((b) => b.kind === kind)
    if (alike.length < 2) continue
    const one = alike.reduce((a, b) => merged(a, b, n))
    kept = [...kept.filter((b) => b.kind !== kind), one]
  }
  for (;;) {
    const ice = kept.filter((b) => b.kind === 'ice').sort((a, b) => a.g[H]! - b.g[H]!)
    if (ice.length <= mostCandidates) break
    let best = 1
    for (let k = 2; k < ice.length; k++) {
      const apart = (i: number) => Math.abs(ice[i]!.g[H]! - ice[i - 1]!.g[H]!)
      if (apart(k) < apart(best)) best = k
    }
    const [a, b] = [ice[best - 1]!, ice[best]!]
    kept = [...kept.filter((x) => x !== a && x !== b), merged(a, b, n)]
  }
  return normalised(kept)
}

/** Ice that has wholly melted: its enthalpy is above the liquidus by two standard deviations. */
const hasMelted = (b: Branch, n: number, matter: Matter): boolean => {
  const u_kJ_kg = Math.sqrt(b.g[at(n, H, H)]!)
  const margin_kJ_kg = matter.uFreezing_K * heatCapacity_kJ_kgK(matter, false, matter.hFreezing)
  return b.g[H]! > matter.hFreezing + 0.5 + 2 * margin_kJ_kg + Math.min(u_kJ_kg, 8)
}

/** A branch carried over an interval, with what a jump of its surroundings would have moved. */
export type Carried = { readonly branch: Branch; readonly lean: readonly number[] }

/** Every branch carried over an interval; ice that has melted goes on as liquid that had frozen. */
export function carried(
  bank: readonly Branch[],
  n: number,
  matter: Matter,
  drive: Drive,
): Carried[] {
  return bank.map((b) => {
    const g: Gauss = [...b.g]
    carry(g, n, matter, b.kind === 'ice', drive)
    const lean = [leaning.h, ...Array.from(leaning.sensor.subarray(0, drive.tau_s.length))]
    const branch = { ...b, g }
    return hasMelted(branch, n, matter) && b.kind === 'ice'
      ? { branch: { ...branch, kind: 'melted' as const }, lean }
      : { branch, lean }
  })
}

/**
 * A fresh candidate: the same enthalpy, read on the other curve, some time within the interval.
 *
 * The sensor follows with its lag: over the unknown moment of the turn its share of the jump has
 * mean 1 − L and a spread, L = (τ/Δt)(1 − e^(−Δt/τ)).
 */
export function turnedWithin(
  liquid: Branch,
  n: number,
  matter: Matter,
  drive: Drive,
  share: number,
  from_ms: number,
  to_ms: number,
): Branch {
  const g: Gauss = [...liquid.g]
  const h = g[H]!
  const from_C = temperature_C(matter, false, h)
  // A body with ice in it is coupled a little otherwise than the liquid it was.
  g[at(n, Λ, Λ)] = g[at(n, Λ, Λ)]! + iceCoupling * iceCoupling
  const jump_K = temperature_C(matter, true, h) - from_C
  const cRatio = heatCapacity_kJ_kgK(matter, false, h) / heatCapacity_kJ_kgK(matter, true, h)
  for (let slot = 0; slot < drive.tau_s.length; slot++) {
    const τ = drive.tau_s[slot]!
    const x = drive.dt_s / τ
    const L = x > 1e-6 ? (1 - Math.exp(-x)) / x : 1
    const L2 = x > 1e-6 ? (1 - Math.exp(-2 * x)) / (2 * x) : 1
    const s = sensorOf(slot)
    const a = g[shareOf(slot)]!
    const outside = drive.outside[slot]!
    const soft = touchOnIce(matter, true, outside, h)
    const rest = outside ? 1 - a * soft : (1 - a) * soft
    const env_C = outside ? drive.base1_C + g[Δ]! : drive.felt_C
    const target = temperature_C(matter, true, h) * (1 - rest) + rest * env_C
    const was = from_C * a + (1 - a) * env_C
    const J = target - was
    g[s] = g[s]! + J * (1 - L)
    const keep = L + (1 - L) * cRatio
    for (let k = 0; k < n; k++) if (k !== s) g[at(n, s, k)] = g[at(n, s, k)]! * keep
    const own = at(n, s, s)
    g[own] = g[own]! * keep * keep + J * J * Math.max(0, L2 - L * L)
    if (outside) {
      // What was learned of the share was learned on a liquid; beside ice it is to be seen anew.
      const more = drive.slots[slot]!.shareVar
      const i = shareOf(slot)
      const pull = soft * (temperature_C(matter, true, h) - env_C) * (1 - L)
      g[at(n, i, i)] = g[at(n, i, i)]! + more
      g[at(n, s, i)] = g[at(n, s, i)]! + more * pull
      g[own] = g[own]! + more * pull * pull
    }
    // On the plateau the reading stands on the configured line, which is itself uncertain: from
    // here on the bias of the probe and the error of the line are seen as one.
    const b = at(n, biasOf(slot), biasOf(slot))
    g[b] = g[b]! + matter.uFreezing_K ** 2
  }
  return {
    kind: 'ice',
    w: liquid.w + Math.log(share),
    g,
    from_ms,
    to_ms,
    from_C,
    jump_K,
    placedAsIce: false,
  }
}

/** How one reading of one slot is held against a branch. */
export type Sight = {
  readonly slot: number
  readonly y_C: number
  /** Variance of the reading itself, K². */
  readonly R_K2: number
  readonly t_ms: number
  /** Time since the reading before, s. */
  readonly apart_s: number
}

/** Ice spreads: for a minute or two what the probe touches lags behind (thick or solid foods). */
const front_s = 100
const frontShare = 0.25
/** Ice is nowhere as even as a model of it, K [common practice]. */
const slush_K = 0.08

/** Variance that the spread of ice adds to a reading, K²; 0 where the ice is old or there is none. */
const frontOn = (b: Branch, sight: Sight): number => {
  if (b.kind !== 'ice' || b.placedAsIce) return 0
  const age_s = Math.max(0, (sight.t_ms - b.to_ms) / 1000)
  // Readings close together see the same front: together they count as one.
  const alike = Math.max(1, front_s / Math.max(1, sight.apart_s))
  return (frontShare * b.jump_K * Math.exp(-age_s / front_s)) ** 2 * alike
}

export type Weighed = {
  readonly z: number
  readonly log: number
  readonly S: number
  readonly R_K2: number
  readonly innovation: number
}

/**
 * How well a branch foresaw a reading. Just after a turn the probe may stand in the ice already or
 * still beside it: either is as likely as the other.
 */
export function weigh(b: Branch, n: number, sight: Sight): Weighed {
  const s = sensorOf(sight.slot)
  const bias = biasOf(sight.slot)
  const slush2 = b.kind === 'ice' && !b.placedAsIce ? slush_K * slush_K : 0
  const R = sight.R_K2 + slush2
  const S = varianceOfSum(b.g, n, s, bias) + R
  const innovation = sight.y_C - b.g[s]! - b.g[bias]!
  const z2 = (innovation * innovation) / S
  const there: Weighed = { z: Math.sqrt(z2), log: logDensity(z2, S), S, R_K2: R, innovation }
  const front2 = frontOn(b, sight)
  // The probe then stands between where it was and the plateau, never above it.
  if (front2 < 1e-4 || innovation > 0) return there
  const wide2 = (innovation * innovation) / (S + front2)
  const beside = logDensity(wide2, S + front2)
  const log = sumLogs([there.log, beside]) - Math.LN2
  return there.log > beside
    ? { ...there, log }
    : { z: Math.sqrt(wide2), log, S: S + front2, R_K2: R + front2, innovation }
}

/** A branch that has seen a reading; a far one moves it less (Student's t as a scaled Gaussian). */
export function seen(b: Branch, n: number, sight: Sight, by: Weighed): Branch {
  const g: Gauss = [...b.g]
  const trust = Math.min(1, (ν + 1) / (ν + by.z * by.z))
  const S = by.S + by.R_K2 * (1 / trust - 1)
  correct(g, n, sensorOf(sight.slot), biasOf(sight.slot), by.innovation, S)
  return { ...b, g, w: b.w + by.log }
}

/** What a probe is vouched for, and what it touches, as far as a story may stretch them. */
export type Stretch = {
  readonly slot: number
  readonly bias_K: number
  readonly biasSoft_K: number
  readonly share: number
  readonly shareReach: number
}

const beyond = (x: number, reach: number, soft: number): number =>
  Math.abs(x) <= reach ? 0 : -0.5 * ((Math.abs(x) - reach) / soft) ** 2

/**
 * Log of how credible a story is that needs this bias and this share. A bias is bounded by the
 * accuracy of the probe; the Gaussian of the filter alone would let every story buy its way.
 */
export const credible = (g: readonly number[], by: Stretch): number =>
  beyond(g[biasOf(by.slot)]!, by.bias_K, by.biasSoft_K) +
  beyond(g[shareOf(by.slot)]! - by.share, by.shareReach, by.shareReach / 2.5)

/** Surroundings that jump: how likely within the interval, and how far. */
export type Jump = {
  readonly chance: number
  readonly size_K: number
  /** Nothing around the item is warmer or colder than this, °C. */
  readonly warmest_C: number
  readonly coldest_C: number
}

/** A liquid branch of which the surroundings may have jumped within the interval. */
const jumped = (c: Carried, n: number, size_K: number): Gauss => {
  const g: Gauss = [...c.branch.g]
  const v = new Array<number>(n).fill(0)
  v[Δ] = size_K
  v[H] = 0.6 * size_K * c.lean[0]!
  for (let slot = 0; slot + 1 < c.lean.length; slot++)
    v[sensorOf(slot)] = 0.6 * size_K * c.lean[slot + 1]!
  for (let i = 0; i < n; i++)
    for (let j = 0; j <= i; j++) {
      const place = n + (i * (i + 1)) / 2 + j
      g[place] = g[place]! + v[i]! * v[j]!
    }
  return g
}

/** Log of the chance that the surroundings of a branch are within what is possible. */
const logPossible = (g: readonly number[], n: number, base_C: number, jump: Jump): number => {
  const sd = Math.sqrt(g[at(n, Δ, Δ)]!)
  const env = base_C + g[Δ]!
  const inside = normal((jump.warmest_C - env) / sd) - normal((jump.coldest_C - env) / sd)
  return Math.log(Math.max(inside, 1e-12))
}

/**
 * A liquid branch sees a reading: as it was foreseen, or with surroundings that jumped.
 *
 * @returns the branch, and the share of the jump in it, for all branches alike
 */
export function liquidSeen(
  c: Carried,
  n: number,
  sight: Sight,
  base_C: number,
  jump: Jump,
): { branch: Branch; calm: Weighed; share: number; log: number } {
  const calm = weigh(c.branch, n, sight)
  const quiet = seen(c.branch, n, sight, calm)
  const before = logPossible(c.branch.g, n, base_C, jump)
  const quietLog = calm.log + Math.min(0, logPossible(quiet.g, n, base_C, jump) - before)
  const wild: Branch = { ...c.branch, g: jumped(c, n, jump.size_K) }
  const by = weigh(wild, n, sight)
  const stirred = seen(wild, n, sight, by)
  const wildLog =
    by.log +
    Math.min(0, logPossible(stirred.g, n, base_C, jump) - logPossible(wild.g, n, base_C, jump))
  const a = Math.log1p(-jump.chance) + quietLog
  const b = Math.log(jump.chance) + wildLog
  const log = sumLogs([a, b])
  const share = Math.exp(b - log)
  const g: Gauss = [...quiet.g]
  mix(g, stirred.g, n, share)
  return { branch: { ...c.branch, g, w: c.branch.w + log }, calm, share, log }
}
