import { advance, unknownsOf } from './advance.js'
import { calledBy, committed, fromPlateau_z, unmade } from './calling.js'
import { biasOf, sensorOf, Δ } from './estimate.js'
import { at, type Gauss } from './gauss.js'
import { forkOdds, gentleAfter, opensFork, returned, wronglyAside } from './lookalikes.js'
import { temperature_C } from './matter.js'
import { type Group, type Plan, valueAt } from './plan.js'
import { normalised, type Sight, type Stretch, thinned } from './rivals.js'
import { slotPrior } from './slots.js'
import { bankOf, meantFrozen } from './start.js'
import type { Branch, Core, Fork, ItemTrack, SlotTrack } from './state.js'
import { jumpOf } from './surroundings.js'
import { expectation, tell } from './tell.js'
import { isStuck, looksFahrenheit, noiseAfter, runOf } from './trust.js'

/** Noise of a good probe beyond its resolution, and the part of its accuracy that flickers, K. */
const leastNoise_K = 0.03
const flicker = 0.1
/** A sibling is the witness's like, not the witness: this much they may differ, K. */
const siblingNoise_K = 0.3

/** How fast the scale of the innovations is learned, and its bounds. */
const scaleGain = 0.06
const scaleRange: readonly [number, number] = [0.4, 25]

/** Lags after which a probe stands where it went. */
const settling_T90 = 3

/** Odds (logs) from which the probe is taken to have left its item. */
const apartFrom = 5
/** Odds below which it is taken to have read its item all along. */
const notApart = -7

const withSlot = (track: ItemTrack, k: number, slot: SlotTrack): ItemTrack => ({
  ...track,
  slots: track.slots.map((s, i) => (i === k ? slot : s)),
})

/** The probe gave back what it was lent: its story without the readings since is the true one. */
const apart = (track: ItemTrack, fork: Fork, why: SlotTrack['apartWhy']): ItemTrack => {
  const slot = track.slots[fork.slot]!
  // A turn that was called on readings which were not the item's own is taken back with them.
  const own = track.called !== null && track.called.at_ms < fork.since_ms
  const called = own || track.called?.reckoned ? track.called : null
  return withSlot({ ...track, called, bank: fork.bank, fork: null, strong: 0 }, fork.slot, {
    ...slot,
    trusted_ms: fork.trusted_ms,
    trusted_C: fork.trusted_C,
    apart_ms: fork.since_ms,
    apartWhy: why,
    level_C: fork.level_C,
    aside_C: fork.level_C,
    gentle: 0,
    back: 0,
  })
}

/**
 * A reading of a probe that touches an item.
 *
 * @param k      slot of the item
 * @param y_C    corrected by the calibration
 * @param raw_C  as sent
 * @returns      the item's track with the reading put to use, or set aside for a stated reason
 */
export function hearOwn(
  plan: Plan,
  group: Group,
  core: Core,
  local: number,
  k: number,
  t_ms: number,
  y_C: number,
  raw_C: number,
): ItemTrack {
  const item = plan.items[group.items[local]!]!
  const n = unknownsOf(item)
  if (t_ms >= item.removed_ms) return core.items[local]!
  const moved = advance(plan, group, core, local, t_ms)
  let { track } = moved
  if (track.t_ms < 0) return track
  const kind = item.slots[k]!.kind
  const probe = plan.probes[item.slots[k]!.probe]!
  const last = track.slots[k]!
  const resolution = probe.given.resolution_K
  const noise2 = leastNoise_K ** 2 + (flicker * probe.given.accuracy_K) ** 2 + last.noise_K2 * 0.5
  const R_K2 =
    noise2 * last.scale + resolution ** 2 / 12 + (kind === 'sibling' ? siblingNoise_K ** 2 : 0)
  const apart_s = last.t_ms < 0 ? 3600 : (t_ms - last.t_ms) / 1000
  const sight: Sight = { slot: k, y_C, R_K2, t_ms, apart_s }
  const all = moved.carried
  const foreseen = expectation(all, n, sight)
  const stepExpected = last.raw_C === null ? 0 : foreseen.expected_C - (last.trusted_C ?? y_C)
  const run = runOf(last, raw_C, t_ms, stepExpected, resolution)
  const noise_K2 = noiseAfter(last, raw_C, run.same, resolution)
  const heard: SlotTrack = {
    ...last,
    ...run,
    t_ms,
    raw_C,
    before_C: last.raw_C,
    noise_K2,
    count: last.count + 1,
  }

  if (last.apartWhy === 'stuck' && run.same > 1) return withSlot(thinOnly(track, n), k, heard)
  if (isStuck(heard) && last.apart_ms < 0) {
    const from = { ...heard, trusted_ms: heard.sameFrom_ms }
    const why = { apart_ms: heard.sameFrom_ms, apartWhy: 'stuck' as const, level_C: y_C, back: 0 }
    const fork = track.fork?.slot === k ? null : track.fork
    return withSlot(thinOnly({ ...track, fork, strong: 0 }, n), k, { ...from, ...why })
  }
  if (last.trusted_C !== null && looksFahrenheit(y_C, last.trusted_C) && foreseen.z > 5) {
    return withSlot(thinOnly(track, n), k, {
      ...heard,
      apart_ms: last.apart_ms < 0 ? t_ms : last.apart_ms,
      apartWhy: 'fahrenheit',
      level_C: y_C,
      back: 0,
    })
  }
  if (last.apart_ms >= 0 && last.apartWhy === 'left') {
    const back = returned(last, y_C, foreseen)
    if (back.again) {
      // The sensor comes from elsewhere: it has its lag before it and says nothing of the item yet.
      const bank = track.bank.map((b) => ({ ...b, g: sensorAt(b.g, n, k, y_C, R_K2) }))
      const slot = {
        ...heard,
        trusted_ms: t_ms,
        trusted_C: y_C,
        apart_ms: -1,
        apartWhy: 'none' as const,
        back: 0,
      }
      return withSlot(thinOnly({ ...track, bank }, n), k, slot)
    }
    // While its own lag still carries it to wherever it went, it shows nothing yet.
    const settling = t_ms - last.apart_ms < settling_T90 * probe.given.T90_s * 1000
    const gentle = settling ? 0 : gentleAfter(last, y_C)
    const aside_C = settling ? y_C : last.aside_C
    if (wronglyAside(gentle, last, y_C)) {
      const ice = track.called === null ? null : 0.95
      const seenNow = { T_C: y_C, u_K: 0.3 + probe.given.accuracy_K / 2, ice }
      const bank = bankOf(plan, item, t_ms, track.based, seenNow)
      const slot = {
        ...heard,
        trusted_ms: t_ms,
        trusted_C: y_C,
        apart_ms: -1,
        apartWhy: 'none' as const,
        back: 0,
        gentle: 0,
      }
      return withSlot({ ...track, bank, fork: null, strong: 0 }, k, slot)
    }
    return withSlot(thinOnly(track, n), k, {
      ...heard,
      level_C: y_C,
      aside_C,
      back: back.count,
      gentle,
    })
  }

  const unit = plan.units[track.unit]!
  const matter = item.matter[track.matter]!.value
  const jump = jumpOf(
    unit,
    t_ms,
    track.based,
    kind === 'wall',
    moved.drive.dt_s,
    track.based ? Math.max(track.base_C, moved.drive.base0_C) : null,
  )
  const prior = slotPrior(plan, item.slots[k]!, matter.gradient)
  const warmAir = track.based && track.base_C > matter.freezing_C
  const meantIce = item.item.previouslyFrozen || meantFrozen(item, t_ms)
  const stretch: Stretch = {
    slot: k,
    bias_K: 1.2 * probe.given.accuracy_K + 2 * matter.uFreezing_K + 0.02,
    biasSoft_K: 0.3 * probe.given.accuracy_K + 0.02,
    share: prior.share,
    shareReach: 2.5 * Math.sqrt(prior.shareVar),
  }
  const told = tell(all, n, sight, track.base_C, jump, stretch)
  const scale = Math.min(
    scaleRange[1],
    Math.max(scaleRange[0], last.scale * (1 + scaleGain * (Math.min(told.z2, 6) - 1))),
  )
  const trusting: SlotTrack = {
    ...heard,
    scale,
    trusted_ms: t_ms,
    trusted_C: y_C,
    apart_ms: -1,
    apartWhy: 'none',
    back: 0,
  }
  let fork = track.fork
  let forkBank = moved.forked.map((c) => c.branch)
  if (fork?.shelved) {
    if (fork.slot === k && unmade(all, moved.forked, n, matter, sight, moved.drive)) {
      const inFork = tell(moved.forked, n, sight, track.base_C, jump, stretch)
      const called = (track.called?.at_ms ?? 0) < fork.since_ms ? track.called : null
      return withSlot({ ...track, called, bank: inFork.bank, fork: null, strong: 0 }, k, trusting)
    }
    if (t_ms - fork.since_ms > shelvedFor_ms) fork = null
  } else if (fork !== null && fork.slot === k) {
    const inFork = tell(moved.forked, n, sight, track.base_C, jump, stretch)
    const { odds, back } = forkOdds(fork, told.log, inFork.log, y_C, R_K2)
    if (back) {
      // It reads the item again: the story that had set it aside is the better one throughout.
      const better = odds > 0
      const bank = better ? inFork.bank : told.bank
      track = withSlot({ ...track, bank, fork: null }, k, trusting)
      return {
        ...track,
        ...calledBy(
          track,
          t_ms,
          true,
          probe.given.T90_s,
          apart_s,
          warmAir,
          fromPlateau_z(track, matter, sight, prior, kind === 'wall'),
          meantIce,
        ),
      }
    }
    if (odds >= notApart) fork = { ...fork, odds, level_C: y_C }
    else fork = iceWeight(told.bank) > 0.5 ? { ...fork, odds: shelvedOdds, shelved: true } : null
    if (fork !== null && !fork.shelved && odds > apartFrom)
      return apart(
        withSlot(thinOnly(track, n), k, heard),
        { ...fork, bank: thinned(forkBank, n) },
        'left',
      )
  } else if (fork !== null) {
    // Another probe of the item saw this: both stories of the forked one hear it.
    const inFork = tell(moved.forked, n, sight, track.base_C, jump, stretch)
    fork = { ...fork, odds: fork.odds + inFork.log - told.log }
    forkBank = [...inFork.bank]
  }
  if ((fork === null || fork.shelved) && track.fork === fork && kind !== 'sibling') {
    const odds = opensFork(
      told.log,
      foreseen.innovation,
      y_C,
      moved.drive.dt_s,
      track.based ? track.base_C : null,
    )
    if (odds !== null) {
      fork = {
        slot: k,
        since_ms: t_ms,
        odds,
        shelved: false,
        bank: [],
        level_C: y_C,
        trusted_ms: last.trusted_ms,
        trusted_C: last.trusted_C,
      }
      forkBank = all.map((c) => c.branch)
    }
  }
  track = withSlot(
    {
      ...track,
      bank: told.bank,
      fork: fork === null ? null : { ...fork, bank: thinned(forkBank, n) },
    },
    k,
    trusting,
  )
  track = { ...track, bank: committed(track, n) }
  const doubtful = track.fork !== null && !track.fork.shelved && track.fork.odds > 0
  const next: ItemTrack = {
    ...track,
    ...calledBy(
      track,
      t_ms,
      !doubtful && kind !== 'sibling',
      probe.given.T90_s,
      apart_s,
      warmAir,
      fromPlateau_z(track, matter, sight, prior, kind === 'wall'),
      meantIce,
    ),
  }
  // The doubt has been weighed in the call; it must not come back on another occasion.
  const justCalled = next.called !== null && track.called === null
  return justCalled && next.fork !== null
    ? { ...next, fork: { ...next.fork, odds: shelvedOdds, shelved: true } }
    : next
}

const iceWeight = (bank: readonly Branch[]): number =>
  bank.reduce((sum, b) => sum + (b.kind === 'liquid' ? 0 : Math.exp(b.w)), 0)

/** How long the story over which a turn was called is kept, ms. */
const shelvedFor_ms = 8 * 3_600_000
/** It carries no weight meanwhile (log odds). */
const shelvedOdds = -60

/** A sensor known to stand at a reading, whatever it was thought to: nothing else is learned. */
const sensorAt = (
  was: readonly number[],
  n: number,
  k: number,
  y_C: number,
  R_K2: number,
): Gauss => {
  const g: Gauss = [...was]
  const s = sensorOf(k)
  for (let j = 0; j < n; j++) g[at(n, s, j)] = j === s ? R_K2 : 0
  g[s] = y_C - g[biasOf(k)]!
  return g
}

const thinOnly = (track: ItemTrack, n: number): ItemTrack => ({
  ...track,
  bank: thinned(normalised(track.bank), n),
  fork: track.fork === null ? null : { ...track.fork, bank: thinned(track.fork.bank, n) },
})

/** The temperature of the surroundings that an item's own readings speak of, and its uncertainty. */
export function surroundingsOf(
  plan: Plan,
  group: Group,
  track: ItemTrack,
  local: number,
): { env_C: number; u_K: number } {
  const item = plan.items[group.items[local]!]!
  const n = unknownsOf(item)
  const top = track.bank.reduce((a, b) => (b.w > a.w ? b : a))
  const matter = valueAt(item.matter, track.t_ms)
  const env = { env_C: track.base_C + top.g[Δ]!, u_K: Math.sqrt(top.g[at(n, Δ, Δ)]!) }
  if (top.kind === 'ice' || env.u_K < 1.5) return env
  return { env_C: temperature_C(matter, false, top.g[0]!), u_K: 2 }
}
