import { type Drive, touchOnIce, Δ } from './estimate.js'
import { heatCapacity_kJ_kgK, ice_kg_kg, type Matter, temperature_C } from './matter.js'
import { type Carried, type Sight, sumLogs, thinned } from './rivals.js'
import type { SlotPrior } from './slots.js'
import type { Branch, ItemTrack } from './state.js'
import { expectation } from './tell.js'

/** When what is known amounts to saying that it has turned, and when that is taken back. */

/** P(ice has formed at some time), over both stories of the probe. */
export const turnedProbability = (track: ItemTrack): number => {
  const of = (bank: readonly Branch[]) =>
    bank.reduce((sum, b) => sum + (b.kind === 'liquid' ? 0 : Math.exp(b.w)), 0)
  const own = of(track.bank)
  if (track.fork === null) return Math.min(1, own)
  const apart = 1 / (1 + Math.exp(-track.fork.odds))
  return Math.min(1, (1 - apart) * own + apart * of(track.fork.bank))
}

/** Readings on which ice is at least this probable count towards a call. */
const probable = 0.95
const certain = 0.9999
const needed = 2
/** A reading so near to where a settled probe would stand on the plateau speaks for itself. */
const onPlateau_z = 2.5
/** Farther than this from where its own freezing point would show, by what is vouched for. */
const nearPlateau_z = 3
const slack_K = 0.1
/** A rise must have come to its end: so long, in lags of the probe, must it look like ice. */
const wait_T90 = 1.5
const waitRange_s: readonly [number, number] = [10, 300]

/**
 * Does what is known now amount to calling it turned? Once called it stays.
 *
 * @param apart_s    since the reading before: a probe that is still on its way shows nothing at once
 * @param warmAir    the air that serves it is above its line
 * @param settled_z  how far the reading is from the plateau of the heaviest story with ice
 * @param meantIce   it is meant to be frozen, or was once. Other stock that only stays level in cold
 *                   air tells ice and liquid by nothing but small misfits of the model, which add up
 *                   over hours: no ground to say that it was placed frozen. In warm air a plateau is.
 */
export const calledBy = (
  track: ItemTrack,
  t_ms: number,
  trusted: boolean,
  T90_s: number,
  apart_s: number,
  warmAir: boolean,
  settled_z: number,
  meantIce: boolean,
): Partial<ItemTrack> => {
  const p = turnedProbability(track)
  // While its measured air is warmer than its line a rise proves little: it may just be warmed.
  const isStrong = trusted && p >= (warmAir ? certain : probable)
  const strong = !trusted ? track.strong : isStrong ? track.strong + 1 : 0
  const strong_ms = isStrong && track.strong > 0 ? track.strong_ms : t_ms
  if (track.called !== null || !isStrong) return { strong, strong_ms }
  const [least, most] = waitRange_s
  const wait_ms = 1000 * Math.min(most, Math.max(least, wait_T90 * T90_s))
  // A rise that does not end on the item's own freezing point is no call, whatever it is.
  if (settled_z > nearPlateau_z) return { strong, strong_ms }
  const atOnce = p >= certain && settled_z < onPlateau_z && apart_s >= T90_s
  if (atOnce || (strong >= needed && t_ms - strong_ms >= wait_ms)) {
    const iced = track.bank.filter((b) => b.kind !== 'liquid')
    const placed = iced.reduce((s, b) => s + (b.placedAsIce ? Math.exp(b.w) : 0), 0)
    const placedAsIce = placed > 0.5
    if (placedAsIce && !meantIce && !warmAir) return { strong, strong_ms }
    return { strong, strong_ms, called: { at_ms: t_ms, reckoned: placedAsIce, placedAsIce } }
  }
  return { strong, strong_ms }
}

/** How far a reading is from where a settled probe would stand on the heaviest story with ice. */
export const fromPlateau_z = (
  track: ItemTrack,
  matter: Matter,
  sight: Sight,
  prior: SlotPrior,
  outside: boolean,
): number => {
  const iced = track.bank.filter((b) => b.kind === 'ice')
  if (iced.length === 0) return Number.POSITIVE_INFINITY
  const top = iced.reduce((a, b) => (b.w > a.w ? b : a))
  const T = temperature_C(matter, true, top.g[0]!)
  const soft = touchOnIce(matter, true, outside, top.g[0]!)
  const rest = outside ? 1 - prior.share * soft : (1 - prior.share) * soft
  const away_K = (outside ? track.base_C + top.g[Δ]! : track.felt_C) - T
  const spread2 = prior.shareVar * soft * soft * away_K * away_K
  // Not the scaled noise: a model that fits badly must not bring the plateau nearer.
  const u2 = prior.biasVar_K2 + matter.uFreezing_K ** 2 + spread2 + slack_K ** 2
  return Math.abs(sight.y_C - T - rest * away_K) / Math.sqrt(u2)
}

/** Once a turn is called the liquid story keeps no more than this: the verdict stands by its word. */
const doubtKept = Math.log(0.05)

export const committed = (track: ItemTrack, n: number): readonly Branch[] => {
  if (track.called === null || (track.called.reckoned && !track.called.placedAsIce))
    return track.bank
  const over = track.bank.some((b) => b.kind === 'liquid' && b.w > doubtKept)
  const iced = track.bank.some((b) => b.kind !== 'liquid')
  if (!over || !iced) return track.bank
  const cut = track.bank.map((b) =>
    b.kind === 'liquid' ? { ...b, w: Math.min(b.w, doubtKept) } : b,
  )
  return thinned(raised(cut), n)
}

/** Stories with ice take up what the liquid one was not left. */
const raised = (bank: readonly Branch[]): Branch[] => {
  const liquid = sumLogs(bank.filter((b) => b.kind === 'liquid').map((b) => b.w))
  const ice = sumLogs(bank.filter((b) => b.kind !== 'liquid').map((b) => b.w))
  const rest = Math.log1p(-Math.exp(Math.min(liquid, -1e-9)))
  return bank.map((b) => (b.kind === 'liquid' ? b : { ...b, w: b.w - ice + rest }))
}

/** A drop from the plateau that ice cannot make: beyond what could have frozen through, K. */
const leastDrop_K = 1
const dropMargin = 1.5
const stillSlush = 0.8

/**
 * Does a reading unmake a call? It falls from the plateau faster than ice could have frozen through,
 * and to where the liquid story, which heard nothing since, expects it: the probe was elsewhere.
 */
export const unmade = (
  all: readonly Carried[],
  forked: readonly Carried[],
  n: number,
  matter: Matter,
  sight: Sight,
  drive: Drive,
): boolean => {
  const iced = all.filter((c) => c.branch.kind === 'ice')
  if (iced.length === 0 || forked.length === 0) return false
  const top = iced.reduce((a, b) => (b.branch.w > a.branch.w ? b : a)).branch
  const h = top.g[0]!
  if (ice_kg_kg(matter, h) > stillSlush * matter.solidIce_kg_kg) return false
  const T = temperature_C(matter, true, h)
  const env_C = drive.base1_C + top.g[Δ]!
  const rate = (2 * matter.coupling_kW_kgK) / heatCapacity_kJ_kgK(matter, false, matter.hFreezing)
  const couldFall_K = Math.max(0, T - env_C) * -Math.expm1(-rate * drive.dt_s)
  const fell_K = -expectation(all, n, sight).innovation
  if (fell_K < leastDrop_K + dropMargin * couldFall_K) return false
  const liquid = forked.filter((c) => c.branch.kind !== 'ice')
  return liquid.length > 0 && expectation(liquid, n, sight).z < 2.5
}
