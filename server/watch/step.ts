import type { Reading } from '../../config/schema/reading.js'
import type { Judgement } from '../../config/schema/verdict.js'
import { evidenceOf } from './evidence.js'
import { type Facts, glanceOf, judgementAt, viewOf } from './judgement.js'
import { placed } from './lateness.js'
import { type Group, type Plan, valueAt } from './plan.js'
import { type Announced, freshState, type GroupState } from './state.js'

export type Input =
  /** Readings as they arrived, at one instant of the clock. */
  | { readonly kind: 'readings'; readonly readings: readonly Reading[]; readonly now_ms: number }
  /** The clock has come so far. */
  | { readonly kind: 'clock'; readonly now_ms: number }

export type Event =
  /** Standing, phase, evidence or hasBeenFrozen of an item is another than was last announced. */
  | { readonly kind: 'changed'; readonly judgement: Judgement }
  /** A turn was called; `withdrawn`: later readings took it back. */
  | { readonly kind: 'turned' | 'withdrawn'; readonly item: string; readonly t_ms: number }

/** Timers fall due on whole multiples of this since 1970 UTC (rulings.md 2). */
export const tick_ms = 10_000
/** Slow drift of an estimate is looked at once a minute; silence at every tick. */
const look_ms = 60_000

const differs = (a: Facts, b: Announced): boolean =>
  a.standing !== b.standing ||
  a.phase !== b.phase ||
  a.evidence !== b.evidence ||
  a.hasBeenFrozen !== b.hasBeenFrozen

/** One item looked at: announced anew where it differs from what was announced. */
const look = (
  plan: Plan,
  group: Group,
  state: GroupState,
  local: number,
  t_ms: number,
  events: Event[],
): void => {
  const index = group.items[local]!
  ;(state.looked_ms as number[])[local] = t_ms
  const view = viewOf(plan, state, index, t_ms)
  if (view === null) return
  const glance = glanceOf(plan, view)
  const last = state.announced[local]!
  if (!differs(glance, last)) return
  const judgement = judgementAt(plan, state, index, t_ms)
  if (judgement === null) return
  const { standing, phase, evidence, hasBeenFrozen } = judgement
  const facts = { standing, phase, evidence, hasBeenFrozen }
  if (!differs(facts, last)) return
  ;(state.announced as Announced[])[local] = facts
  events.push({ kind: 'changed', judgement })
  const item = judgement.item
  if (facts.hasBeenFrozen && !last.hasBeenFrozen && facts.standing === 'Turned')
    events.push({ kind: 'turned', item, t_ms })
  if (!facts.hasBeenFrozen && last.hasBeenFrozen) events.push({ kind: 'withdrawn', item, t_ms })
}

/** Next instant at which something may change with nothing heard: an item placed or removed. */
const nextOccasion = (plan: Plan, group: Group, after_ms: number): number =>
  Math.min(
    Number.POSITIVE_INFINITY,
    ...group.items.flatMap((i) => {
      const { placed_ms, removed_ms } = plan.items[i]!
      return [placed_ms, removed_ms].filter((t) => t > after_ms)
    }),
  )

/** All timers due by an instant, in order, each at its due time. */
const fireTimers = (
  plan: Plan,
  group: Group,
  state: GroupState,
  now_ms: number,
  events: Event[],
): void => {
  if (state.clock_ms < 0) return
  let t_ms = (Math.floor(state.clock_ms / tick_ms) + 1) * tick_ms
  while (t_ms <= now_ms) {
    const policy = valueAt(plan.policy, t_ms)
    let living = false
    for (let local = 0; local < group.items.length; local++) {
      const item = plan.items[group.items[local]!]!
      if (t_ms < item.placed_ms) continue
      const track = state.core.items[local]!
      const best =
        evidenceOf(plan, group, state.core, item, track, t_ms, policy.silentAfter_intervals)[0]
          ?.evidence ?? 'not assessable'
      const last = state.announced[local]!
      if (best !== 'not assessable') living = true
      const due = best !== 'not assessable' && t_ms - state.looked_ms[local]! >= look_ms
      if (due || best !== last.evidence || last.standing === null)
        look(plan, group, state, local, t_ms, events)
    }
    // Where nothing bears on anything no timer runs: on to the next thing that can happen.
    t_ms = living
      ? t_ms + tick_ms
      : Math.max(t_ms + tick_ms, Math.ceil(nextOccasion(plan, group, t_ms) / tick_ms) * tick_ms)
  }
}

/**
 * The only door of the watch: a group's state after one input, and what changed.
 *
 * Value in, value out: the state that goes in must not be used again, since its lists may be taken
 * over for speed; the one that comes out is complete. Before the input is applied all timers due by
 * its clock fire in order, dated at their due times, so that live, restart and replay agree. The
 * clock never runs back: an input from before it is applied at the clock.
 *
 * When `state.needsReplayFrom_ms` comes out set, readings older than what is remembered came late:
 * call `replayed` with all readings of the group.
 */
export function step(
  state: GroupState,
  input: Input,
  plan: Plan,
): { state: GroupState; events: readonly Event[] } {
  const group = groupNamed(plan, state.group)
  const now_ms = Math.max(state.clock_ms, input.now_ms)
  const events: Event[] = []
  fireTimers(plan, group, state, now_ms, events)
  if (input.kind === 'clock') return { state: { ...state, clock_ms: now_ms }, events }
  const before = state.core
  const next = { ...placed(plan, group, state, input.readings), clock_ms: now_ms }
  lookAtChanged(plan, group, next, before, now_ms, events)
  return { state: next, events }
}

const lookAtChanged = (
  plan: Plan,
  group: Group,
  state: GroupState,
  before: GroupState['core'],
  now_ms: number,
  events: Event[],
): void => {
  for (let local = 0; local < group.items.length; local++) {
    const heardOwn =
      state.core.items[local]!.slots !== before.items[local]!.slots ||
      state.core.items[local]!.called !== before.items[local]!.called
    const never = state.announced[local]!.standing === null
    if (heardOwn || never || now_ms - state.looked_ms[local]! >= look_ms)
      look(plan, group, state, local, now_ms, events)
  }
}

const groupNamed = (plan: Plan, id: string): Group => {
  const group = plan.groups.find((g) => g.id === id)
  if (group === undefined) throw new Error(`no group ${id} in this plan`)
  return group
}

/**
 * A group's state made anew from all of its readings: for those that came later than what is
 * remembered. What was announced and the clock stay; what differs now is announced.
 *
 * @param readings  every reading of the group that has been received by the state's clock
 */
export function replayed(
  state: GroupState,
  readings: readonly Reading[],
  plan: Plan,
): { state: GroupState; events: readonly Event[] } {
  const group = groupNamed(plan, state.group)
  const fresh = placed(plan, group, freshState(plan, group), readings)
  const next = {
    ...fresh,
    clock_ms: state.clock_ms,
    announced: state.announced,
    looked_ms: state.looked_ms,
    needsReplayFrom_ms: null,
  }
  const events: Event[] = []
  for (let local = 0; local < group.items.length; local++)
    look(plan, group, next, local, Math.max(0, state.clock_ms), events)
  return { state: next, events }
}
