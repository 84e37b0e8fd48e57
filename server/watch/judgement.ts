import type {
  Evidence,
  Interval,
  Judgement,
  Limit,
  Phase,
  Standing,
} from '../../config/schema/verdict.js'
import { modelVersion } from '../../config/schema/verdict.js'
import { advance, thin, unknownsOf } from './advance.js'
import { turnedProbability } from './calling.js'
import { cautionsFor, tagsOf } from './cautions.js'
import { type Chances, chancesOn, isPoised } from './chance.js'
import { evidenceOf, placeAt, type Witnessed } from './evidence.js'
import { whyOf } from './explain.js'
import { crossing_h, type Heading, headingOf } from './forecast.js'
import { chancesOver } from './hazard.js'
import { ifItFreezes } from './ifItFreezes.js'
import type { Matter } from './matter.js'
import { phaseOf } from './phase.js'
import { type Plan, type PlannedItem, valueAt } from './plan.js'
import { type Estimate, reckoned } from './reckon.js'
import { meantFrozen } from './start.js'
import type { GroupState, ItemTrack } from './state.js'

/** All that a verdict is made of, at one clock. */
export type View = {
  readonly item: PlannedItem
  readonly track: ItemTrack
  readonly matter: Matter
  readonly estimate: Estimate
  readonly evidence: readonly Witnessed[]
  readonly best: Evidence
  readonly heading: Heading
  readonly now_ms: number
  readonly witnessTurned: boolean
  readonly p: number
}

/**
 * An item as it stands at a clock: its track carried on without being changed, and what bears on it.
 *
 * @returns null before the item was placed
 */
export function viewOf(
  plan: Plan,
  state: GroupState,
  itemIndex: number,
  now_ms: number,
): View | null {
  const item = plan.items[itemIndex]!
  const group = plan.groupOfItem(item.id)!
  const local = group.localItem.get(itemIndex)!
  if (now_ms < item.placed_ms) return null
  const { core } = state
  const moved = advance(plan, group, core, local, now_ms)
  if (moved.track.t_ms < 0 || moved.track.bank.length === 0) return null
  const track = thin(moved.track, unknownsOf(item))
  const matter = item.matter[track.matter]!.value
  const policy = valueAt(plan.policy, now_ms)
  const evidence = evidenceOf(plan, group, core, item, track, now_ms, policy.silentAfter_intervals)
  const best = evidence[0]?.evidence ?? 'not assessable'
  const estimate = reckoned(plan, item, track, isMeasured(best))
  const witness = item.witness < 0 ? null : core.items[group.localItem.get(item.witness)!]!
  return {
    item,
    track,
    matter,
    estimate,
    evidence,
    best,
    heading: headingOf(core.units[group.localUnit.get(track.unit)!], track, matter, estimate),
    now_ms,
    witnessTurned: witness !== null && witness.called !== null,
    p: turnedProbability(track),
  }
}

const isMeasured = (e: Evidence): boolean => e.startsWith('measured')

/** Chance of turning ahead, given still liquid now; null clear above the line or when nobody knows. */
const chancesOf = (plan: Plan, v: View): Chances | null => {
  const policy = valueAt(plan.policy, v.now_ms)
  if (v.track.called !== null || v.best === 'not assessable') return null
  if (v.estimate.below <= 1 - policy.belowConfidence) return null
  return chancesOn(v.item, v.track, v.matter, v.heading, policy, isMeasured(v.best))
}

/** The one word: the first that applies (watch.md §5). */
const standingOf = (plan: Plan, v: View, chances: Chances | null): Standing => {
  const policy = valueAt(plan.policy, v.now_ms)
  if (v.track.called !== null) return 'Turned'
  if (v.best === 'not assessable' || v.estimate.within_K > policy.usefulU_K) return 'Silent'
  const { below } = v.estimate
  if (below >= policy.belowConfidence) {
    const poised = chances !== null && isPoised(chances, policy, v.track.poised)
    return poised || v.witnessTurned ? 'Poised' : 'Below'
  }
  return below <= 1 - policy.belowConfidence ? 'Above' : 'Near'
}

const phaseNow = (plan: Plan, v: View, standing: Standing): Phase => {
  const policy = valueAt(plan.policy, v.now_ms)
  const known = v.best !== 'not assessable' && v.estimate.within_K <= policy.usefulU_K
  if (!known || standing === 'Silent') return 'unknown'
  return phaseOf(v.track, v.estimate, v.matter.solidIce_kg_kg, policy.belowConfidence)
}

/** The four facts a change is announced of, without the rest of the verdict. */
export type Facts = {
  readonly standing: Standing
  readonly phase: Phase
  readonly evidence: Evidence
  readonly hasBeenFrozen: boolean
}

/** A chance reckoned on the track so lately need not be reckoned again to see whether to look closer. */
const recently_ms = 60_000

/**
 * The facts at little cost: where the track has just reckoned whether the item is poised, by that.
 * What is announced is always taken from the full verdict.
 */
export function glanceOf(plan: Plan, v: View): Facts {
  const { poised, poised_ms } = v.track
  if (v.track.called !== null || poised_ms < 0 || v.now_ms - poised_ms > recently_ms)
    return factsOf(plan, v, standingOf(plan, v, chancesOf(plan, v)))
  const standing = standingOf(plan, v, null)
  return factsOf(plan, v, standing === 'Below' && poised ? 'Poised' : standing)
}

const factsOf = (plan: Plan, v: View, standing: Standing): Facts => {
  return {
    standing,
    phase: phaseNow(plan, v, standing),
    evidence: v.best,
    hasBeenFrozen: v.item.item.previouslyFrozen || v.track.called !== null,
  }
}

const sideOf = (C: number, range: readonly [number, number] | undefined): Limit =>
  range === undefined ? 'unknown' : C < range[0] ? 'below' : C > range[1] ? 'above' : 'inside'

/** Q1, from the best reading that measures the item or its air, never from the estimate. */
const limitsOf = (plan: Plan, v: View): Judgement['limits'] => {
  const reading = v.evidence.find((e) => e.evidence !== 'inferred from neighbour')
  if (reading === undefined)
    return { reading_C: null, probe: null, label: 'unknown', alert: 'unknown', action: 'unknown' }
  const product = valueAt(v.item.product, v.now_ms)
  return {
    reading_C: reading.C,
    probe: plan.probes[reading.probe]!.given.id,
    label: sideOf(reading.C, product.label_C),
    alert: sideOf(reading.C, product.limits?.alert_C),
    action: sideOf(reading.C, product.limits?.action_C),
  }
}

/** How many of the batch have turned, and the chance that any has. */
const countsOf = (v: View): { any: Interval; count: Interval } => {
  const { count } = v.item.item
  const { exposure } = v.track
  const watched = isMeasured(v.best) || (v.track.called !== null && !v.track.called.reckoned)
  const lived = (n: number) =>
    chancesOver(v.matter, v.matter.noExposure, [{ exposure, weight: 1 }], n)
  const p = v.track.called !== null && !v.track.called.reckoned ? 1 : v.p
  if (!watched) {
    if (v.track.called?.placedAsIce) return { any: [1, 1, 1], count: [count, count, count] }
    const { one, any } = lived(count)
    return { any, count: one.map((q) => Math.round(q * count)) as Interval }
  }
  if (v.track.called?.placedAsIce) return { any: [1, 1, 1], count: [count, count, count] }
  const { one, any: rest } = lived(count - 1)
  return {
    any: rest.map((q) => 1 - (1 - p) * (1 - q)) as Interval,
    count: one.map((q) => Math.round(p + q * (count - 1))) as Interval,
  }
}

const turnOf = (
  v: View,
): { earliest: string | null; latest: string | null; from_C: number | null } => {
  const none = { earliest: null, latest: null, from_C: null }
  const { called, bank } = v.track
  if (called === null && v.p < 0.5) return none
  const iced = bank.filter((b) => b.kind !== 'liquid')
  const all = iced.reduce((s, b) => s + Math.exp(b.w), 0)
  const heavy = iced.filter((b) => Math.exp(b.w) >= 0.05 * all)
  if (heavy.length === 0) return none
  const instant = (t_ms: number) => new Date(t_ms).toISOString().replace('.000Z', 'Z')
  const from_ms = called?.reckoned ? v.item.placed_ms : Math.min(...heavy.map((b) => b.from_ms))
  const to_ms = called?.reckoned ? called.at_ms : Math.max(...heavy.map((b) => b.to_ms))
  return {
    earliest: instant(from_ms),
    latest: instant(to_ms),
    from_C:
      heavy.reduce((s, b) => s + Math.exp(b.w) * b.from_C, 0) /
      heavy.reduce((s, b) => s + Math.exp(b.w), 0),
  }
}

/** The whole verdict of an item at a clock, its reasons as keys; null before it was placed. */
export function judgementAt(
  plan: Plan,
  state: GroupState,
  itemIndex: number,
  now_ms: number,
): Judgement | null {
  const v = viewOf(plan, state, itemIndex, now_ms)
  if (v === null) return null
  const { item, matter, estimate } = v
  const policy = valueAt(plan.policy, now_ms)
  const product = valueAt(item.product, now_ms)
  const container = valueAt(item.container, now_ms)
  const unit = valueAt(plan.units[placeAt(item, now_ms)]!.given, now_ms)
  const chances = chancesOf(plan, v)
  const standing = standingOf(plan, v, chances)
  const phase = phaseNow(plan, v, standing)
  const known = v.best !== 'not assessable'
  const { called } = v.track
  const hasBeenFrozen = item.item.previouslyFrozen || called !== null
  const meantIce = meantFrozen(item, now_ms)
  const asIntended =
    (meantIce && known && estimate.icy >= 0.5 && phase !== 'thawing') ||
    (product.harm === 'meant-supercooled' &&
      known &&
      standing !== 'Turned' &&
      standing !== 'Silent')
  const counts = countsOf(v)
  const liquid = called === null && estimate.icy < 0.5
  const below_h =
    known && liquid && estimate.T_C >= matter.freezing_C
      ? crossing_h(v.heading, matter.freezing_C, 'below')
      : null
  const above_h =
    known && liquid && estimate.T_C < matter.freezing_C
      ? crossing_h(v.heading, matter.freezing_C, 'above')
      : null
  const situation = {
    standing,
    phase,
    harm: product.harm,
    asIntended,
    hasBeenFrozen,
    container: { fill_kg: container.fill_kg, sealed: container.sealed },
    storageUnitKind: unit.kind,
    tags: tagsOf(product),
  }
  return {
    t_ms: now_ms,
    item: item.item.id,
    standing,
    phase,
    hasBeenFrozen,
    evidence: v.best,
    evidenceProbes: v.evidence.map((e) => plan.probes[e.probe]!.given.id),
    temperature_C: known ? estimate.T_C : null,
    u_K: known ? estimate.u_K : null,
    freezingPoint_C: matter.freezing_C,
    freezingPoint_u_K: matter.substance.freezingPoint_u_K,
    margin_K: known ? estimate.T_C - matter.freezing_C : null,
    belowProbability: known ? estimate.below : null,
    turned: {
      probability:
        called !== null && !called.reckoned ? Math.max(v.p, called === null ? 0 : v.p) : v.p,
      ...counts,
      ...turnOf(v),
      reckoned: called?.reckoned ?? false,
    },
    chance:
      chances === null
        ? null
        : {
            horizon_h: chances.horizon_h,
            one: chances.one,
            any: chances.any,
            low: chances.any[0],
            middle: chances.any[1],
            high: chances.any[2],
            any_1h: chances.any_1h,
            basis: 'literature prior, 0 events here',
          },
    ifItFreezes: known && liquid ? ifItFreezes(plan, v) : null,
    crossing: { below_h, above_h },
    limits: limitsOf(plan, v),
    asIntended,
    heldBy: null,
    disposition: null,
    harmAssessed: null,
    cautions: cautionsFor(situation, plan.library.cautions),
    why: whyOf(plan, v, { standing, phase, asIntended, chances, policy }),
    model: modelVersion,
    configRevision: plan.site.configRevision,
  }
}

/**
 * The full verdict of an item at a clock.
 *
 * @param item    its id or its index in the site file
 * @param now_ms  at or after the state's clock
 * @returns       null before the item was placed
 */
export const judgementOf = (
  state: GroupState,
  item: string | number,
  plan: Plan,
  now_ms: number,
): Judgement | null =>
  judgementAt(plan, state, typeof item === 'number' ? item : plan.itemIndex(item), now_ms)
