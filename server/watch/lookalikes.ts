import { logDensity } from './rivals.js'
import type { Fork, SlotTrack } from './state.js'

/**
 * The rival of every thermal story: the probe no longer reads its item. It was pulled out, swapped,
 * moved, or has iced over. From then on its readings follow something else and move as they like.
 */

/** How often a probe leaves its item: once in two thousand hours [common practice]. */
const leaves_h = 5e-4
/** Where a probe that left may read: anywhere in this span, or at two likely places. */
const span_K = 60
const icing_C = 0
const icingShare = 0.15
const icingSpread_K = 0.12
const airShare = 0.2
const airSpread_K = 1.2

/** A reading this much denser is no occasion for a second story (log of a density per K). */
const surprise = Math.log(0.01)

/** A probe that leaves its item steps by at least this, K. */
const leastStep_K = 0.6

const gaussLog = (x: number, σ: number): number =>
  -0.5 * (x / σ) ** 2 - Math.log(σ * Math.sqrt(2 * Math.PI))

/** Log density of the first reading of a probe that has left its item. */
const elsewhereLog = (y_C: number, air_C: number | null): number =>
  Math.log(
    (1 - icingShare - airShare) / span_K +
      icingShare * Math.exp(gaussLog(y_C - icing_C, icingSpread_K)) +
      (air_C === null
        ? airShare / span_K
        : airShare * Math.exp(gaussLog(y_C - air_C, airSpread_K))),
  )

/**
 * Log odds that a surprising reading means that the probe has left its item.
 *
 * @param off_K        how far the reading is from what was foreseen: a slow rise is no such step
 * @param foreseenLog  log density that the thermal stories together gave the reading
 * @param air_C        what the air reading says, null where there is none
 * @returns            null where the reading is no surprise
 */
export function opensFork(
  foreseenLog: number,
  off_K: number,
  y_C: number,
  dt_s: number,
  air_C: number | null,
): number | null {
  if (foreseenLog > surprise || Math.abs(off_K) < leastStep_K) return null
  const chance = -Math.expm1((-leaves_h * Math.max(dt_s, 5)) / 3600)
  return Math.log(chance) + elsewhereLog(y_C, air_C) - foreseenLog
}

/** A probe elsewhere: mostly as steady as a probe can be, now and then it wanders. */
const wanderLog = (step_K: number, R_K2: number): number =>
  Math.log(
    0.6 * Math.exp(logDensity(step_K ** 2 / (2 * R_K2 + 0.01), 2 * R_K2 + 0.01)) +
      0.4 * Math.exp(logDensity(step_K ** 2 / 0.5, 0.5)),
  )

/** Gains under this many nats per reading are those of a noise model, not of a story. */
const indifference = 0.3
/** Chance per reading that a probe that left is back at its item. */
const backShare = 0.02

/**
 * The odds after one more reading, and whether the probe is back by it.
 *
 * @param attachedLog  log density under the story in which it reads the item all along
 * @param awaitedLog   log density under the story that had set it aside, were it back now
 */
export function forkOdds(
  fork: Fork,
  attachedLog: number,
  awaitedLog: number,
  y_C: number,
  R_K2: number,
): { odds: number; back: boolean } {
  const away = Math.log(1 - backShare) + wanderLog(y_C - fork.level_C, R_K2)
  const back = Math.log(backShare) + awaitedLog
  const log = Math.max(away, back) + Math.log1p(Math.exp(-Math.abs(away - back)))
  const gain = log - attachedLog
  // A story is not better for being a little sharper.
  const clear = gain > 0 ? Math.max(0, gain - indifference) : gain
  return { odds: fork.odds + clear, back: back > away + 4 }
}

/** A probe is taken back when it foresaw its item well for so many readings. */
const backAfter = 3
/** Where the estimate is loose anything would fit: then only a step back counts. */
const tight_K2 = 0.5
const patient = 8

/** A probe that has left stands still or jumps. One that has gone this far in steps so small has not. */
const wandered_K = 3
const gentleStep_K = 1
const gentleSteps = 12

/** Gentle steps of a probe that was set aside, after one more reading. */
export const gentleAfter = (slot: SlotTrack, y_C: number): number =>
  Math.abs(y_C - slot.level_C) < gentleStep_K ? slot.gentle + 1 : 0

/**
 * Was a probe wrongly set aside? It has moved far, without a jump, as only a body does: then it is
 * the picture of the item that was wrong (its mass, its coupling), and that begins anew.
 */
export const wronglyAside = (gentle: number, slot: SlotTrack, y_C: number): boolean =>
  gentle >= gentleSteps && Math.abs(y_C - slot.aside_C) > wandered_K

/** Does a probe that had left read its item again? */
export function returned(
  slot: SlotTrack,
  y_C: number,
  foreseen: { readonly z: number; readonly S: number },
): { again: boolean; count: number } {
  if (foreseen.z > 2.5) return { again: false, count: 0 }
  const stepped = Math.abs(y_C - slot.level_C) > 0.5
  const count = slot.back + (stepped ? patient : foreseen.S < tight_K2 ? 1 : 0)
  return { again: count >= backAfter, count }
}
