import type { Policy } from '../../config/schema/site.js'
import type { Phase } from '../../config/schema/verdict.js'
import { ownSpeaks } from './advance.js'
import { chancesOn, isPoised } from './chance.js'
import { headingOf } from './forecast.js'
import type { Matter } from './matter.js'
import { type Plan, type PlannedItem, valueAt } from './plan.js'
import { type Estimate, reckoned } from './reckon.js'
import { reckonedTurn } from './reckonedTurn.js'
import type { ItemTrack, UnitTrack } from './state.js'

/** Solid from this share of the ice at −20 °C on, and no longer below that (rulings.md 7). */
const solidFrom = 0.9
const solidUntil = 0.85
/** More ice is freezing, less is thawing: against half an hour ago, by at least this, kg/kg. */
const lookBack_ms = 30 * 60_000
const iceStep_kg_kg = 0.01
/** How often the ice of the estimate is noted, ms. */
const note_ms = 5 * 60_000

/** The phase of an estimate, given the last one (rulings.md 7). */
export function phaseOf(
  track: ItemTrack,
  estimate: Estimate,
  solidIce_kg_kg: number,
  confidence: number,
): Phase {
  const last = track.phase
  // Until a turn is called the phase follows the standing, which says liquid.
  const iced = track.called !== null && estimate.icy >= 0.5
  if (!iced) {
    if (estimate.below >= confidence) return 'supercooled'
    if (estimate.below <= 1 - confidence) return 'liquid'
    if (last === 'liquid' || last === 'supercooled') return last
    return estimate.below >= 0.5 ? 'supercooled' : 'liquid'
  }
  const share = estimate.ice_kg_kg / Math.max(1e-6, estimate.icy) / solidIce_kg_kg
  if (share >= solidFrom || (last === 'frozen' && share >= solidUntil)) return 'frozen'
  const then = track.ice.findLast(([t]) => t <= track.t_ms - lookBack_ms) ?? track.ice[0]
  const grown = then === undefined ? 0 : estimate.ice_kg_kg - then[1]
  if (grown >= iceStep_kg_kg) return 'freezing'
  if (grown <= -iceStep_kg_kg) return 'thawing'
  if (last === 'freezing' || last === 'thawing') return last
  return last === 'frozen' ? 'thawing' : 'freezing'
}

/** Time over which an item's surroundings are averaged for its forecast, s. */
const mean_s = 1200
/** A change larger than this is a new level, K. */
const newLevel_K = 3

const surroundingsAfter = (
  track: ItemTrack,
  estimate: Estimate,
  settle_s: number,
): Pick<ItemTrack, 'env_C' | 'env_ms' | 'felt_C'> => {
  const now = estimate.env_C
  const { felt_C } = track
  if (track.env_ms < 0) return { env_C: now, env_ms: track.t_ms, felt_C }
  const f = Math.exp(-(track.t_ms - track.env_ms) / 1000 / mean_s)
  const mean = f * track.env_C + (1 - f) * now
  const g = Math.exp(-(track.t_ms - track.env_ms) / 1000 / settle_s)
  return {
    env_C: Math.abs(mean - now) > newLevel_K ? now : mean,
    env_ms: track.t_ms,
    felt_C: g * felt_C + (1 - g) * now,
  }
}

/** How often the chance is reckoned on the track, ms of data time: it costs more than the rest. */
const reckonEvery_ms = 60_000

const poisedAfter = (
  item: PlannedItem,
  track: ItemTrack,
  matter: Matter,
  estimate: Estimate,
  policy: Policy,
  measured: boolean,
  unit: UnitTrack,
): { poised: boolean; poised_ms: number } => {
  if (track.called !== null || estimate.below < policy.belowConfidence)
    return { poised: false, poised_ms: -1 }
  const { poised, poised_ms } = track
  if (poised_ms >= 0 && track.t_ms - poised_ms < reckonEvery_ms) return { poised, poised_ms }
  const heading = headingOf(unit, track, matter, estimate)
  const chances = chancesOn(item, track, matter, heading, policy, measured)
  return { poised: isPoised(chances, policy, poised), poised_ms: track.t_ms }
}

/** Does a monitoring probe of the air, or in a buffer, speak for a storage unit? */
const monitored = (plan: Plan, unit: UnitTrack, t_ms: number): boolean =>
  unit.probes.some(
    (p) =>
      !p.stuck &&
      plan.probes[p.probe]!.given.role !== 'control' &&
      t_ms - p.trusted_ms < 5 * plan.probes[p.probe]!.interval_ms,
  )

/**
 * What follows a step on the track of the readings: the phase, the ice noted for the next half hour,
 * and a turn that depth and time alone make sure of (rulings.md 3).
 *
 * @param own   a probe of the item itself was heard
 * @param unit  where it stands
 */
export function followed(
  plan: Plan,
  item: PlannedItem,
  track: ItemTrack,
  own: boolean,
  unit: UnitTrack,
): ItemTrack {
  if (track.t_ms < 0 || track.bank.length === 0) return track
  const matter = item.matter[track.matter]!.value
  const measured = own || ownSpeaks(plan, item, track, track.t_ms, 5)
  const estimate = reckoned(plan, item, track, measured)
  const policy = valueAt(plan.policy, track.t_ms)
  const last = track.ice.at(-1)
  const noted =
    last === undefined || track.t_ms - last[0] >= note_ms
      ? [
          ...track.ice.filter(([t]) => t > track.t_ms - lookBack_ms - 2 * note_ms),
          [track.t_ms, estimate.ice_kg_kg] as const,
        ]
      : track.ice
  const settled = { ...track, ice: noted, ...surroundingsAfter(track, estimate, matter.settle_s) }
  const next = {
    ...settled,
    ...poisedAfter(item, settled, matter, estimate, policy, measured, unit),
  }
  const called =
    track.called ??
    (own ? null : reckonedTurn(plan, item, track, estimate, monitored(plan, unit, track.t_ms)))
  return {
    ...next,
    called,
    phase: phaseOf({ ...next, called }, estimate, matter.solidIce_kg_kg, policy.belowConfidence),
  }
}
