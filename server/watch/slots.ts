import { skinShare } from './estimate.js'
import type { Plan, Slot } from './plan.js'

/** What a probe touches, by its kind: share of the product, and how sure that is (watch.md §4). */
const share: Record<Slot['kind'], readonly [mean: number, u: number]> = {
  'in-item': [1, 0.01],
  witness: [1, 0.01],
  wall: [0.73, 0.08],
  sibling: [1, 0.05],
}
/** The inner gradient of a large body shows in what a probe inside it touches. */
const mostGradient = 0.08
/** A sibling is the witness's like, not the witness, K. */
const sibling_K = 0.3

export type SlotPrior = {
  readonly share: number
  readonly shareVar: number
  readonly biasVar_K2: number
}

/** What is believed of a slot before any reading. @param gradient  of the item's body */
export function slotPrior(plan: Plan, slot: Slot, gradient: number): SlotPrior {
  const probe = plan.probes[slot.probe]!
  const [a, ua] = share[slot.kind]
  const onWall = slot.kind === 'wall'
  const inside = onWall ? 0.1 * gradient : Math.min(mostGradient, gradient / 2)
  const bias = Math.max(probe.given.accuracy_K / Math.sqrt(3), 0.01)
  const apart = slot.kind === 'sibling' ? sibling_K ** 2 : 0
  return {
    // The skin of a still body is colder than its mean, so that less of the mean is felt there.
    share: onWall ? a / (1 + skinShare * gradient) : a,
    shareVar: ua * ua + inside * inside,
    biasVar_K2: bias * bias + apart,
  }
}
