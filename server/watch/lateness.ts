import type { Reading } from '../../config/schema/reading.js'
import { heardInOrder } from './core.js'
import type { Group, Plan } from './plan.js'
import { beforeAll, type Checkpoint, type GroupState, type Heard, type Place } from './state.js'
import { believable } from './trust.js'

/**
 * Where a late reading belongs. The core is a function of the set of readings in the order of
 * (device time, seq, probe), never of arrival: one that comes late takes the core back to the
 * checkpoint before it and is walked through again with all that came after.
 */

/** Readings this far back from the newest can still be put in place here, ms. */
export const remembered_ms = 6 * 3_600_000
/** Data time between checkpoints, ms. */
const checkpointEvery_ms = 15 * 60_000
/** Older checkpoints stand wider apart: by this share of their age. */
const thinning = 0.4
/** Cores kept of the last steps, in memory alone: readings of two probes often cross by a second. */
const mostRecent = 12

const order = (a: Place, b: Place): number => a[0] - b[0] || a[1] - b[1] || a[2] - b[2]

/** First place in a sorted list that is not before a place. */
const lowerBound = (heard: readonly Heard[], place: Place): number => {
  let low = 0
  let high = heard.length
  while (low < high) {
    const middle = (low + high) >> 1
    if (order(heard[middle]!.place, place) < 0) low = middle + 1
    else high = middle
  }
  return low
}

const same = (a: number | null, b: number | null) => a === b

/** One more message under a key: the same again is nothing; another value is a contradiction. */
const joined = (was: Heard, value: number | null, believed: boolean): Heard | null => {
  if (was.values_C.some((v) => same(v, value)))
    return believed && !was.believed ? { ...was, believed: true } : null
  const values_C = [...was.values_C, value].sort((a, b) => (a ?? -1e9) - (b ?? -1e9))
  return { ...was, values_C, believed: was.believed || believed }
}

/** Steps kept per state so that a crossing of a second costs a step, not a quarter of an hour. */
const recentOf = new WeakMap<readonly Checkpoint[], Checkpoint[]>()

/**
 * Readings put in their places, and the core brought up to them.
 *
 * The lists of the state are changed in place: the caller has given the state away.
 */
export function placed(
  plan: Plan,
  group: Group,
  state: GroupState,
  readings: readonly Reading[],
): GroupState {
  const heard = state.heard as Heard[]
  let first: Place | null = null
  let needsReplayFrom_ms = state.needsReplayFrom_ms
  for (const r of readings) {
    const probe = plan.probeIndex(r.probe)
    if (probe < 0) continue
    const place: Place = [r.t_ms, r.seq, probe]
    if (r.t_ms <= state.forgotten_ms) {
      needsReplayFrom_ms = Math.min(needsReplayFrom_ms ?? r.t_ms, r.t_ms)
      continue
    }
    const believed = believable(r, plan.probes[probe]!)
    const value = r.celsius !== null && Number.isFinite(r.celsius) ? r.celsius : null
    const at = lowerBound(heard, place)
    const there = heard[at]
    if (there !== undefined && order(there.place, place) === 0) {
      const now = joined(there, value, believed)
      if (now === null) continue
      heard[at] = now
    } else {
      const entry: Heard = {
        place,
        values_C: [value],
        believed,
        late: r.quality === 'historic' || r.quality === 'late entry',
      }
      if (at === heard.length) heard.push(entry)
      else heard.splice(at, 0, entry)
    }
    if (first === null || order(place, first) < 0) first = place
  }
  const held = { ...state, needsReplayFrom_ms }
  return first === null ? held : settled(plan, group, held, first)
}

/** The core taken back before a place, where it has passed it, and brought up to the newest. */
const settled = (plan: Plan, group: Group, state: GroupState, from: Place): GroupState => {
  const heard = state.heard
  let { core, upTo } = state
  let checkpoints = [...state.checkpoints]
  let recent = recentOf.get(state.checkpoints) ?? []
  let k = lowerBound(heard, from)
  if (order(from, upTo) <= 0) {
    recent = recent.filter((c) => order(c.before, from) <= 0)
    const kept = checkpoints.filter((c) => order(c.before, from) <= 0)
    checkpoints = kept
    const back = recent.at(-1) ?? kept.at(-1)!
    core = back.core
    k = lowerBound(heard, back.before)
  }
  for (; k < heard.length; k++) {
    const entry = heard[k]!
    const last = checkpoints.at(-1)!
    if (entry.place[0] - last.before[0] >= checkpointEvery_ms)
      checkpoints.push({ before: entry.place, core })
    if (k >= heard.length - mostRecent) recent.push({ before: entry.place, core })
    core = heardInOrder(plan, group, core, entry)
    upTo = entry.place
  }
  const newest_ms = upTo[0]
  checkpoints = thinnedOut(checkpoints, newest_ms)
  recentOf.set(checkpoints, recent.slice(-mostRecent))
  const oldest = checkpoints[0]!.before
  const drop = lowerBound(heard, oldest)
  if (drop > 0) (heard as Heard[]).splice(0, drop)
  return {
    ...state,
    heard,
    core,
    upTo,
    checkpoints,
    forgotten_ms: oldest[0] > beforeAll[0] ? oldest[0] - 1 : state.forgotten_ms,
  }
}

/** Checkpoints by age: close together lately, wide apart before, one beyond what is remembered. */
const thinnedOut = (all: readonly Checkpoint[], newest_ms: number): Checkpoint[] => {
  const kept: Checkpoint[] = []
  for (let k = all.length - 1; k >= 0; k--) {
    const c = all[k]!
    const later = kept.at(-1)
    const age = newest_ms - c.before[0]
    const gap = later === undefined ? Number.POSITIVE_INFINITY : later.before[0] - c.before[0]
    if (age >= remembered_ms) {
      kept.push(c)
      break
    }
    if (k === 0 || gap >= thinning * age) kept.push(c)
  }
  return kept.reverse()
}
