import type { Policy } from '../../config/schema/site.js'
import type { Interval } from '../../config/schema/verdict.js'
import { exposureAhead, type Heading } from './forecast.js'
import { chancesOver } from './hazard.js'
import type { Matter } from './matter.js'
import type { PlannedItem } from './plan.js'
import type { ItemTrack } from './state.js'

/** Chance of turning ahead, given still liquid now, of one container and of any of the batch. */
export type Chances = {
  readonly one: Interval
  readonly any: Interval
  readonly any_1h: Interval
  readonly horizon_h: number
}

/**
 * The chances along a heading, handling left out (rulings.md 4).
 *
 * @param measured  a probe would have shown a turn: what was survived is known to have been survived
 */
export function chancesOn(
  item: PlannedItem,
  track: ItemTrack,
  matter: Matter,
  heading: Heading,
  policy: Policy,
  measured: boolean,
): Chances {
  const ahead = exposureAhead(matter, heading, policy.poisedHorizon_h)
  const survived = measured ? track.exposure : matter.noExposure
  const { count } = item.item
  return {
    ...chancesOver(matter, survived, ahead.horizon, count),
    any_1h: chancesOver(matter, survived, ahead.hour, count).any,
    horizon_h: policy.poisedHorizon_h,
  }
}

/**
 * A chance over the site's limit makes an item Poised; it stays so until the chance is well under
 * the limit. The margin between is a fifth: the interval of such a chance spans decades, so that a
 * smaller step down says nothing.
 */
const leavesAt = 0.2

/** Is the item poised by this chance, given whether it was? */
export const isPoised = (chances: Chances, policy: Policy, was: boolean): boolean => {
  const any = chances.any[policy.chanceQuantile === 'high' ? 2 : 1]
  return any >= policy.poisedChance * (was ? leavesAt : 1)
}
