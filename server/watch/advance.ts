import { airSpeaks, heldTo } from './air.js'
import { type Drive, H, own, perSlot, skinShare, Δ, Λ } from './estimate.js'
import { at, correct, type Gauss } from './gauss.js'
import { aliveAfter, exposed } from './hazard.js'
import { enthalpy_kJ_kg, heatCapacity_kJ_kgK, type Matter, temperature_C } from './matter.js'
import { type Group, type Plan, type PlannedItem, valueAt } from './plan.js'
import { type Carried, carried, normalised, thinned, turnedWithin } from './rivals.js'
import { slotPrior } from './slots.js'
import { started } from './start.js'
import type { Branch, Core, ItemTrack, UnitTrack } from './state.js'
import { drift, spreadOfPosition_K } from './surroundings.js'

/** Intervals without air readings after which the air is only remembered. */
const staleIntervals = 5

export const unknownsOf = (item: PlannedItem): number => own + perSlot * item.slots.length

/**
 * Chance per hour that a supercooled item turns for a reason that no kinetics knows (handling, a
 * crystal from outside). Only where a probe would show it, and none within half a kelvin of the
 * line, where both stories nearly agree (watch.md §10).
 */
const unknownCause_h = 0.01
/** A wall alone shows least of it: there a turn must not be starved by its prior. */
const wallAlone_h = 0.03
const fromDepth_K = 0.4
const fullDepth_K = 1

const unknownCause = (depth_K: number, onWallAlone: boolean): number =>
  (onWallAlone ? wallAlone_h : unknownCause_h) *
  Math.min(1, Math.max(0, (depth_K - fromDepth_K) / (fullDepth_K - fromDepth_K)))

/** Uncertainty of an ordinary probe: only what goes beyond it counts towards a possible depth, K. */
const ordinary_u_K = 0.15
/**
 * While a probe of its own is heard, kinetics may claim no more than this per hour: its interval
 * spans decades, and what the probe shows must decide.
 */
const watchedMost_h = 0.1
/** So deep the claim doubles, and beyond it soon is as good as certain, K. */
const deep_K = 8
const watchedMost = (depth_K: number): number => watchedMost_h * (1 + (depth_K / deep_K) ** 4)
/** Below this depth no fresh candidate is made: the curves lie within the noise. */
const leastDepth_K = 0.25
/** A switching weight is never lighter than this per step: a real jump must be able to win. */
const leastShare = 1e-9

/** Does an own probe of the item speak at this instant? */
export const ownSpeaks = (
  plan: Plan,
  item: PlannedItem,
  track: ItemTrack,
  t_ms: number,
  staleAfter: number,
): boolean =>
  item.slots.some((slot, k) => {
    const s = track.slots[k]!
    return (
      slot.kind !== 'sibling' &&
      s.trusted_ms >= 0 &&
      t_ms - s.trusted_ms < staleAfter * plan.probes[slot.probe]!.interval_ms
    )
  })

/** What serves as the air of an item at an instant, if anything does. */
const serving = (
  plan: Plan,
  item: PlannedItem,
  track: ItemTrack,
  unit: UnitTrack,
  t_ms: number,
): boolean =>
  unit.source === 'air' ||
  unit.source === 'buffer' ||
  // A neighbour's surroundings are second-hand: own readings know better.
  (unit.source === 'neighbour' &&
    unit.neighbour !== item.index &&
    !ownSpeaks(plan, item, track, t_ms, staleIntervals))

/** The meaning of δ changes with what serves the item: a temperature, or a difference to the air. */
const rebased = (
  bank: readonly Branch[],
  n: number,
  shift_K: number,
  source: UnitTrack['source'],
): Branch[] =>
  bank.map((b) => {
    const g: Gauss = [...b.g]
    g[Δ] = g[Δ]! + shift_K
    if (source !== 'none') {
      const σ = spreadOfPosition_K[source]
      correct(g, n, Δ, Δ, -g[Δ]!, g[at(n, Δ, Δ)]! + σ * σ)
    }
    return { ...b, g }
  })

/** The same temperatures on the curves of a revised product or container. */
const rematter = (bank: readonly Branch[], was: Matter, is: Matter): Branch[] =>
  bank.map((b) => {
    const g: Gauss = [...b.g]
    const onIce = b.kind === 'ice'
    // On ice the amount of ice is kept by keeping the share of the way down the curve.
    g[H] = onIce
      ? is.hFreezing + (g[H]! - was.hFreezing)
      : enthalpy_kJ_kg(is, false, temperature_C(was, false, g[H]!))
    return { ...b, g }
  })

/** Weighted mean temperature of the liquid branches; null when none is left. */
export const liquidMean_C = (bank: readonly Branch[], matter: Matter): number | null => {
  let sum = 0
  let all = 0
  for (const b of bank) {
    if (b.kind === 'ice') continue
    const w = Math.exp(b.w)
    sum += w * temperature_C(matter, false, b.g[H]!)
    all += w
  }
  return all > 0 ? sum / all : null
}

export type Advanced = {
  readonly track: ItemTrack
  /** The branches with what a jump of the surroundings in the last stretch would have done. */
  readonly carried: readonly Carried[]
  readonly forked: readonly Carried[]
  readonly drive: Drive
}

const noDrive = (plan: Plan, item: PlannedItem, matter: Matter): Drive => ({
  slots: item.slots.map((s) => slotPrior(plan, s, matter.gradient)),
  dt_s: 0,
  base0_C: 0,
  baseMean_C: 0,
  base1_C: 0,
  keep: 1,
  deltaQ_K2: 0,
  tau_s: item.slots.map((s) => plan.probes[s.probe]!.tau_s),
  outside: item.slots.map((s) => s.kind === 'wall'),
  felt_C: 0,
})

/** Fresh candidates of every liquid branch for one stretch, and what is left of those. */
const withBirths = (
  all: readonly Carried[],
  n: number,
  matter: Matter,
  drive: Drive,
  /** Chance by the kinetics alone that it turned within the stretch. */
  byKinetics: number,
  watched: boolean,
  from_ms: number,
  to_ms: number,
): Carried[] =>
  all.flatMap((c) => {
    if (c.branch.kind === 'ice') return [c]
    const T = temperature_C(matter, false, c.branch.g[H]!)
    const depth_K = matter.freezing_C - T
    // How deep it may be: the line itself, and the bias of the probe, are only known so well.
    const c_kJ = heatCapacity_kJ_kgK(matter, false, c.branch.g[H]!)
    const u_K = Math.hypot(matter.uFreezing_K, Math.sqrt(c.branch.g[at(n, H, H)]!) / c_kJ)
    const perhaps_K = depth_K + Math.max(0, u_K - ordinary_u_K)
    if (perhaps_K < leastDepth_K || drive.dt_s <= 0) return [c]
    const cause_h = watched
      ? unknownCause(
          perhaps_K,
          !drive.outside.some((x) => !x) && drive.base1_C === 0 && drive.outside.length > 0,
        )
      : 0
    const kinetics = watched
      ? Math.min(byKinetics, (watchedMost(depth_K) * drive.dt_s) / 3600)
      : byKinetics
    const chance = 1 - (1 - kinetics) * Math.exp((-cause_h * drive.dt_s) / 3600)
    const share = Math.min(0.999999, Math.max(leastShare, chance))
    // A light rival gives birth to nothing that could ever count.
    if (c.branch.w + Math.log(share) < -32) return [c]
    const liquid = { ...c.branch, w: c.branch.w + Math.log1p(-share) }
    return [
      { branch: liquid, lean: c.lean },
      {
        branch: turnedWithin(c.branch, n, matter, drive, share, from_ms, to_ms),
        lean: c.lean,
      },
    ]
  })

/**
 * An item carried to an instant: through moves and revisions on the way, its candidates multiplied
 * by what the hazard moved over. It reads no reading.
 *
 * @param t_ms  UTC; before the item's start, or not after where it stands, nothing happens
 */
export function advance(
  plan: Plan,
  group: Group,
  core: Core,
  local: number,
  t_ms: number,
): Advanced {
  const item = plan.items[group.items[local]!]!
  const n = unknownsOf(item)
  let track = core.items[local]!
  let result: readonly Carried[] = []
  let forked: readonly Carried[] = []
  let drive = noDrive(plan, item, item.matter[track.matter]!.value)
  const unitOf = (index: number) => core.units[group.localUnit.get(index)!]!
  if (track.t_ms < 0) {
    const start_ms = Math.max(item.placed_ms, item.parent < 0 ? 0 : item.parentUntil_ms)
    if (t_ms < start_ms) return { track, carried: [], forked: [], drive }
    const unit = unitOf(valueAt(item.places, start_ms))
    const based = unit.source !== 'none'
    const air = {
      based,
      base_C: based ? unit.air_C : 0,
      mark_Ks: based ? heldTo(unit, start_ms) : 0,
    }
    const parentLocal = item.parent < 0 ? -1 : (group.localItem.get(item.parent) ?? -1)
    const parent = parentLocal < 0 ? null : advance(plan, group, core, parentLocal, start_ms).track
    track = started(plan, item, track, start_ms, air, parent)
  }
  const end_ms = Math.min(t_ms, item.removed_ms)
  const still = (bank: readonly Branch[]): Carried[] =>
    bank.map((branch) => ({ branch, lean: new Array<number>(item.slots.length + 1).fill(0) }))
  result = still(track.bank)
  forked = still(track.fork?.bank ?? [])
  while (track.t_ms < end_ms) {
    const next = nextChange(item, track.t_ms, end_ms)
    const unit = unitOf(track.unit)
    const based = serving(plan, item, track, unit, next)
    if (based !== track.based) {
      const shift_K = based ? -unit.air_C : track.base_C
      const source = based ? unit.source : 'none'
      track = {
        ...track,
        based,
        base_C: based ? unit.air_C : 0,
        mark_Ks: based ? heldTo(unit, track.t_ms) : 0,
        bank: rebased(track.bank, n, shift_K, source),
        fork:
          track.fork === null
            ? null
            : { ...track.fork, bank: rebased(track.fork.bank, n, shift_K, source) },
      }
    }
    const dt_s = (next - track.t_ms) / 1000
    const integral = based ? heldTo(unit, next) : 0
    const stale =
      based && !airSpeaks(unit, plan.probes, next, staleIntervals) && unit.source !== 'neighbour'
    const matter = item.matter[track.matter]!.value
    const top = track.bank[0]!
    const base1_C = based ? unit.air_C : 0
    drive = {
      ...drive,
      dt_s,
      base0_C: track.base_C,
      felt_C: track.felt_C,
      baseMean_C: based ? (integral - track.mark_Ks) / dt_s : 0,
      base1_C,
      ...drift(
        based ? unit.source : 'none',
        stale,
        dt_s,
        top.g[at(n, Δ, Δ)]!,
        item.slots.some((s) => s.kind === 'wall'),
      ),
    }
    const watched = ownSpeaks(plan, item, track, next, 8)
    const depth0 = depthOf(track.bank, matter)
    const T1 = liquidAhead_C(track.bank, matter, drive)
    const depth1 = T1 === null ? 0 : Math.max(0, matter.freezing_C - T1)
    const exposure = exposed(matter, track.exposure, depth0, depth1, dt_s)
    const alive = exposure === track.exposure ? track.alive : aliveAfter(matter, exposure)
    const byKinetics = track.alive > 0 ? Math.max(0, 1 - alive / track.alive) : 0
    const stretch = (bank: readonly Branch[]) =>
      withBirths(
        carried(bank, n, matter, drive),
        n,
        matter,
        drive,
        byKinetics,
        watched,
        track.t_ms,
        next,
      )
    result = stretch(track.bank)
    forked = track.fork === null ? [] : stretch(track.fork.bank)
    const bank = result.map((c) => c.branch)
    track = {
      ...track,
      t_ms: next,
      base_C: base1_C,
      mark_Ks: integral,
      bank,
      fork: track.fork === null ? null : { ...track.fork, bank: forked.map((c) => c.branch) },
      exposure,
      alive,
    }
    if (next < end_ms || changesAt(item, next)) {
      track = thin(changed(item, track, next, unitOf, n), n)
      result = still(track.bank)
      forked = still(track.fork?.bank ?? [])
    }
  }
  return { track, carried: result, forked, drive }
}

/** A bank with its weights normalised and its lightest gone: for steps that read no reading. */
export const thin = (track: ItemTrack, n: number): ItemTrack => ({
  ...track,
  bank: thinned(track.bank, n),
  fork: track.fork === null ? null : { ...track.fork, bank: thinned(track.fork.bank, n) },
})

/** Where the heaviest liquid branch will stand after a stretch: enough for an exposure. */
const liquidAhead_C = (bank: readonly Branch[], matter: Matter, drive: Drive): number | null => {
  const top = bank.reduce<Branch | null>(
    (a, b) => (b.kind === 'ice' ? a : a === null || b.w > a.w ? b : a),
    null,
  )
  if (top === null) return null
  const T = temperature_C(matter, false, top.g[H]!)
  const k =
    (matter.coupling_kW_kgK * Math.exp(top.g[Λ]!)) /
    (1 + skinShare * matter.gradient) /
    heatCapacity_kJ_kgK(matter, false, top.g[H]!)
  const env = drive.baseMean_C + top.g[Δ]!
  return env + (T - env) * Math.exp(-k * drive.dt_s)
}

const depthOf = (bank: readonly Branch[], matter: Matter): number => {
  const T = liquidMean_C(bank, matter)
  return T === null ? 0 : Math.max(0, matter.freezing_C - T)
}

const changesOf = (item: PlannedItem): readonly number[] => [
  ...item.places.slice(1).map((p) => p.from_ms),
  ...item.matter.slice(1).map((m) => m.from_ms),
]

const changesAt = (item: PlannedItem, t_ms: number): boolean =>
  (item.places.length > 1 || item.matter.length > 1) && changesOf(item).includes(t_ms)

const nextChange = (item: PlannedItem, after_ms: number, end_ms: number): number =>
  item.places.length === 1 && item.matter.length === 1
    ? end_ms
    : Math.min(end_ms, ...changesOf(item).filter((c) => c > after_ms))

/** A move, or a revision of product or container, at this very instant. */
const changed = (
  item: PlannedItem,
  track: ItemTrack,
  t_ms: number,
  unitOf: (index: number) => UnitTrack,
  n: number,
): ItemTrack => {
  let now = track
  let matter = now.matter
  while (matter + 1 < item.matter.length && item.matter[matter + 1]!.from_ms <= t_ms) matter++
  if (matter !== now.matter) {
    const [was, is] = [item.matter[now.matter]!.value, item.matter[matter]!.value]
    now = { ...now, matter, bank: rematter(now.bank, was, is), fork: null }
  }
  const place = valueAt(item.places, t_ms)
  if (place === now.unit) return now
  const unit = unitOf(place)
  const based = unit.source !== 'none'
  const spread = spreadOfPosition_K[unit.source] ** 2
  // Nothing of the old corner is true of the new one.
  const bank = now.bank.map((b) => {
    const g: Gauss = [...b.g]
    for (let k = 0; k < n; k++) g[at(n, Δ, k)] = k === Δ ? spread : 0
    g[Δ] = based ? 0 : b.g[Δ]! + now.base_C
    return { ...b, g }
  })
  return {
    ...now,
    unit: place,
    based,
    base_C: based ? unit.air_C : 0,
    mark_Ks: based ? heldTo(unit, t_ms) : 0,
    bank: normalised(bank),
    fork: null,
  }
}
