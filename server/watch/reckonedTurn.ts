import { ownSpeaks } from './advance.js'
import { chancesOver } from './hazard.js'
import type { Plan, PlannedItem } from './plan.js'
import type { Estimate } from './reckon.js'
import type { Called, ItemTrack } from './state.js'

/** No liquid water is colder (homogeneous nucleation), °C. */
const surelyIce_C = -38
const sure = 0.95

/**
 * A turn that nobody saw and that depth and time make sure of: the low quantile of the chance on
 * the exposure alone, or colder than any liquid water (rulings.md 3).
 *
 * @param monitored  a probe of the air, or in a buffer, speaks for the storage unit
 */
export function reckonedTurn(
  plan: Plan,
  item: PlannedItem,
  track: ItemTrack,
  estimate: Estimate,
  monitored: boolean,
): Called | null {
  if (!monitored || ownSpeaks(plan, item, track, track.t_ms, 60)) return null
  const m = item.matter[track.matter]!.value
  const placed = track.bank.reduce((s, b) => s + (b.placedAsIce ? Math.exp(b.w) : 0), 0)
  const call = (placedAsIce: boolean): Called => ({
    at_ms: track.t_ms,
    reckoned: true,
    placedAsIce,
  })
  if (placed >= sure) return call(true)
  if (estimate.T_C < surelyIce_C - estimate.u_K) return call(false)
  const { one } = chancesOver(m, m.noExposure, [{ exposure: track.exposure, weight: 1 }], 1)
  const [low] = one
  return low >= sure ? call(false) : null
}
