import type { Fan } from '../../config/schema/api.js'
import { chancesOn, isPoised } from './chance.js'
import { ahead_C, sides } from './forecast.js'
import { chancesOver, exposed } from './hazard.js'
import { viewOf } from './judgement.js'
import type { Matter } from './matter.js'
import { type Plan, valueAt } from './plan.js'
import type { GroupState } from './state.js'

/** What is ahead of an item, were nothing touched: margin, temperature, and the chance so far. */
export type Outlook = {
  readonly margin: readonly Fan[]
  /** Of the product, °C. */
  readonly forecast: readonly Fan[]
  /** At least one of the batch, from now on. */
  readonly chance: readonly Fan[]
}

/** Points of a forecast: enough for a smooth line on any screen. */
const points = 16

/**
 * The forecast of an item from a clock on.
 *
 * @param hours  0.1 … 72
 * @returns      empty lists where nobody can know, or where it holds ice
 */
export function outlookOf(
  state: GroupState,
  item: string | number,
  plan: Plan,
  now_ms: number,
  hours: number,
): Outlook {
  const index = typeof item === 'number' ? item : plan.itemIndex(item)
  const v = viewOf(plan, state, index, now_ms)
  const none: Outlook = { margin: [], forecast: [], chance: [] }
  if (v === null || v.best === 'not assessable' || v.track.called !== null) return none
  const survived = v.best.startsWith('measured') ? v.track.exposure : v.matter.noExposure
  const line = v.matter.freezing_C
  const margin: Fan[] = []
  const forecast: Fan[] = []
  const chance: Fan[] = []
  const paths = sides.map((z, i) => ({ z, weight: i === 1 ? 0.5 : 0.25, E: v.matter.noExposure }))
  let before_s = 0
  for (let k = 0; k <= points; k++) {
    const s = (k / points) * hours * 3600
    const t_ms = now_ms + Math.round(s * 1000)
    const [high, middle, low] = sides.map((z) => ahead_C(v.heading, s, z)) as [
      number,
      number,
      number,
    ]
    forecast.push([t_ms, low, middle, high])
    margin.push([t_ms, low - line, middle - line, high - line])
    for (const p of paths) {
      p.E = exposed(
        v.matter,
        p.E,
        line - ahead_C(v.heading, before_s, p.z),
        line - ahead_C(v.heading, s, p.z),
        s - before_s,
      )
    }
    before_s = s
    const ahead = paths.map((p) => ({ exposure: p.E, weight: p.weight }))
    const [l, m, h] = chancesOver(v.matter, survived, ahead, v.item.item.count).any
    chance.push([t_ms, l, m, h])
  }
  return { margin, forecast, chance }
}

/** How far ahead an item is looked at for the time it becomes Poised, h; later is as good as never. */
const lookAhead_h = 24
/** Halvings of that range: six minutes are near enough for a lead time. */
const leadHalvings = 8

/**
 * Hours until a supercooled item becomes Poised on its heading: early, middle and late, by how cold
 * it and its surroundings are within their uncertainty.
 *
 * @returns null where it is not on its way there within a day, or where nobody can know; the late
 *          end is then at most that day
 */
export function poisedIn_h(
  state: GroupState,
  index: number,
  plan: Plan,
  now_ms: number,
): readonly [number, number, number] | null {
  const v = viewOf(plan, state, index, now_ms)
  if (v === null || v.best === 'not assessable' || v.track.called !== null) return null
  const policy = valueAt(plan.policy, now_ms)
  const measured = v.best.startsWith('measured')
  const poisedAt = (h: number, z: number): boolean => {
    const then = { ...v.heading, T_C: ahead_C(v.heading, h * 3600, z) }
    return isPoised(chancesOn(v.item, v.track, v.matter, then, policy, measured), policy, false)
  }
  const first = (z: number): number => {
    if (!poisedAt(lookAhead_h, z)) return lookAhead_h
    let [low, high] = [0, lookAhead_h]
    for (let k = 0; k < leadHalvings; k++) {
      const middle = (low + high) / 2
      if (poisedAt(middle, z)) high = middle
      else low = middle
    }
    return high
  }
  const [warm, middle, cold] = sides.map(first) as [number, number, number]
  return middle < lookAhead_h ? [cold, middle, warm] : null
}

/** Chances within an hour at which the Waterline changes its tint. */
const tintChances = [0.01, 0.1, 0.5] as const
/** Deeper than this no tint begins, K. */
const deepest_K = 38
/** Halvings of that range: 2 mK are far below a pixel. */
const halvings = 14

type Tints = readonly [number | null, number | null, number | null]
/** Of one product in one container they hang on the count alone; screens ask for them every second. */
const kept = new WeakMap<Matter, Map<string, Tints>>()

/**
 * Margins at which the chance that at least one of the batch turns within an hour reaches 1, 10 and
 * 50 %, at the policy's quantile, were it held there.
 *
 * @returns K, negative; null where no depth reaches it
 */
export function tintsOf(plan: Plan, item: string | number, t_ms: number): Tints {
  const index = typeof item === 'number' ? item : plan.itemIndex(item)
  const planned = plan.items[index]!
  const m = valueAt(planned.matter, t_ms)
  const side = valueAt(plan.policy, t_ms).chanceQuantile === 'high' ? 2 : 1
  const { count } = planned.item
  const known = kept.get(m) ?? new Map<string, Tints>()
  kept.set(m, known)
  const key = `${count} ${side}`
  const found = known.get(key) ?? tintsFor(m, count, side)
  known.set(key, found)
  return found
}

const tintsFor = (m: Matter, count: number, side: 1 | 2): Tints => {
  const at = (depth_K: number) =>
    chancesOver(
      m,
      m.noExposure,
      [{ exposure: exposed(m, m.noExposure, depth_K, depth_K, 3600), weight: 1 }],
      count,
    ).any[side]
  const depthOf = (chance: number): number | null => {
    if (at(deepest_K) < chance) return null
    let [low, high] = [0, deepest_K]
    for (let k = 0; k < halvings; k++) {
      const middle = (low + high) / 2
      if (at(middle) < chance) low = middle
      else high = middle
    }
    return -high
  }
  const [a, b, c] = tintChances.map(depthOf) as [number | null, number | null, number | null]
  return [a, b, c]
}
