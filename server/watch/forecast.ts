import type { Ahead } from '../physics/nucleation.js'
import { H, skinShare } from './estimate.js'
import { exposed } from './hazard.js'
import { heatCapacity_kJ_kgK, type Matter, temperature_C } from './matter.js'
import type { Estimate } from './reckon.js'
import type { ItemTrack, UnitTrack } from './state.js'

/** Where an item is heading while liquid: first order towards its surroundings. */
export type Heading = {
  readonly T_C: number
  readonly u_K: number
  readonly env_C: number
  readonly env_u_K: number
  /** Time constant, s, and its relative uncertainty. */
  readonly tau_s: number
  readonly tauRelU: number
}

/** What a forecast of the surroundings cannot know, K, however well they are measured now. */
const leastEnv_u_K = 0.4

/** The heading of the liquid story of an item; its surroundings averaged over the compressor. */
export function headingOf(
  unit: UnitTrack | undefined,
  track: ItemTrack,
  matter: Matter,
  estimate: Estimate,
): Heading {
  const liquid = track.bank.reduce<ItemTrack['bank'][number] | null>(
    (a, b) => (b.kind === 'ice' ? a : a === null || b.w > a.w ? b : a),
    null,
  )
  const h = liquid?.g[H] ?? matter.hFreezing
  const T_C = liquid === null ? estimate.T_C : temperature_C(matter, false, h)
  const calm = track.based && unit !== undefined ? unit.mean_C - track.base_C : 0
  // Measured air is averaged over its compressor; surroundings felt only through the item, over more.
  const env_C =
    liquid === null || (!track.based && track.env_ms >= 0)
      ? track.env_C
      : track.base_C + liquid.g[1]! + calm
  const λ = liquid?.g[2] ?? 0
  return {
    T_C: estimate.icy < 0.5 ? (estimate.liquid_C ?? T_C) : T_C,
    u_K: Math.hypot(estimate.u_K, matter.uFreezing_K),
    env_C,
    env_u_K: Math.hypot(estimate.env_u_K, leastEnv_u_K),
    tau_s:
      (heatCapacity_kJ_kgK(matter, false, h) * (1 + skinShare * matter.gradient)) /
      (matter.coupling_kW_kgK * Math.exp(λ)),
    tauRelU: matter.couplingRelU,
  }
}

/** Temperature on a heading so many seconds ahead, z standard deviations to one side. */
export const ahead_C = (at: Heading, s: number, z: number): number => {
  const env = at.env_C + z * at.env_u_K
  return env + (at.T_C + z * at.u_K - env) * Math.exp(-s / at.tau_s)
}

/** 10, 50 and 90 % of a Gaussian, and the weights with which three paths stand for it. */
export const sides = [1.2816, 0, -1.2816] as const
const sideWeights = [0.25, 0.5, 0.25]

/** Steps of the integral over a horizon: short ones first, where the heading changes most. */
const partsOfHour = [0.08, 0.25, 0.55, 1]
const partsBeyond = [0.1, 0.25, 0.45, 0.7, 1]

/** Exposures along the heading, over the next hour and over the horizon. */
export function exposureAhead(
  matter: Matter,
  at: Heading,
  horizon_h: number,
): { hour: readonly Ahead[]; horizon: readonly Ahead[] } {
  const hour: Ahead[] = []
  const horizon: Ahead[] = []
  const until_s = horizon_h * 3600
  const first_s = Math.min(3600, until_s)
  sides.forEach((z, i) => {
    const weight = sideWeights[i]!
    let E: readonly number[] = matter.noExposure
    let before_s = 0
    let depth = matter.freezing_C - ahead_C(at, 0, z)
    const to = (s: number) => {
      const next = matter.freezing_C - ahead_C(at, s, z)
      E = exposed(matter, E, depth, next, s - before_s)
      depth = next
      before_s = s
    }
    for (const p of partsOfHour) to(p * first_s)
    hour.push({ exposure: E, weight })
    if (until_s > 3600) for (const p of partsBeyond) to(3600 + p * (until_s - 3600))
    horizon.push({ exposure: E, weight })
  })
  return { hour, horizon }
}

/** Longer than this nobody can see ahead, h: a week, written for "a week or never". */
const farthest_h = 168
/** A crossing that even the low path makes later than this is no forecast, h. */
const soon_h = 48

/**
 * Hours until the line is crossed at the present trend, low, middle, high; null where it is not
 * heading there. A path that never crosses counts as a week.
 */
export function crossing_h(
  at: Heading,
  line_C: number,
  way: 'below' | 'above',
): [number, number, number] | null {
  const sign = way === 'below' ? 1 : -1
  const times: number[] = []
  for (const z of sides) {
    for (const k of [1 - at.tauRelU, 1, 1 + at.tauRelU]) {
      const env = at.env_C + z * at.env_u_K
      const from = at.T_C + z * at.u_K
      if (sign * (from - line_C) <= 0) times.push(0)
      else if (sign * (env - line_C) >= 0) times.push(farthest_h)
      else
        times.push(
          Math.min(
            farthest_h,
            (Math.log((from - env) / (line_C - env)) * at.tau_s * Math.max(0.3, k)) / 3600,
          ),
        )
    }
  }
  const middle = times[4]!
  const sorted = times.sort((a, b) => a - b)
  const low = sorted[1]!
  if (low > soon_h) return null
  return [Math.min(low, middle), middle, Math.max(middle, sorted[7]!)]
}
