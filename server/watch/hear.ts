import { advance, unknownsOf } from './advance.js'
import { biasOf, type Drive, sensorOf, touchOnIce, Δ } from './estimate.js'
import { at, type Gauss } from './gauss.js'
import { forkOdds, gentleAfter, opensFork, returned, wronglyAside } from './lookalikes.js'
import { heatCapacity_kJ_kgK, ice_kg_kg, type Matter, temperature_C } from './matter.js'
import { type Group, type Plan, valueAt } from './plan.js'
import {
  type Carried,
  credible,
  liquidSeen,
  normalised,
  type Sight,
  type Stretch,
  seen,
  sumLogs,
  thinned,
  weigh,
} from './rivals.js'
import { type SlotPrior, slotPrior } from './slots.js'
import { bankOf } from './start.js'
import type { Branch, Core, Fork, ItemTrack, SlotTrack } from './state.js'
import { jumpOf } from './surroundings.js'
import { isStuck, looksFahrenheit, noiseAfter, runOf } from './trust.js'

/** Noise of a good probe beyond its resolution, and the part of its accuracy that flickers, K. */
const leastNoise_K = 0.03
const flicker = 0.1
/** A sibling is the witness's like, not the witness: this much they may differ, K. */
const siblingNoise_K = 0.3

/** How fast the scale of the innovations is learned, and its bounds. */
const scaleGain = 0.06
const scaleRange: readonly [number, number] = [0.4, 25]

/** P(ice has formed at some time), over both stories of the probe. */
export const turnedProbability = (track: ItemTrack): number => {
  const of = (bank: readonly Branch[]) =>
    bank.reduce((sum, b) => sum + (b.kind === 'liquid' ? 0 : Math.exp(b.w)), 0)
  const own = of(track.bank)
  if (track.fork === null) return Math.min(1, own)
  const apart = 1 / (1 + Math.exp(-track.fork.odds))
  return Math.min(1, (1 - apart) * own + apart * of(track.fork.bank))
}

type Told = { readonly bank: readonly Branch[]; readonly log: number; readonly z2: number }

/**
 * Stories that foresee a reading within this of each other (nats) are equally good: so small a
 * difference comes from how their noise is modelled, and over a thousand quiet readings it would
 * decide.
 */
const indifference = 0.1
const beyond = (nats: number): number =>
  Math.sign(nats) * Math.max(0, Math.abs(nats) - indifference)

/** Log density that the heaviest liquid story gave the reading; null where there is none. */
const liquidLog = (
  all: readonly Carried[],
  told: readonly { readonly branch: Branch }[],
): number | null => {
  let best = -1
  for (const [i, c] of all.entries())
    if (c.branch.kind !== 'ice' && (best < 0 || c.branch.w > all[best]!.branch.w)) best = i
  return best < 0 ? null : told[best]!.branch.w - all[best]!.branch.w
}

/** A story that has just stretched bias or share further than is credible weighs less. */
const judgedBy = (now: Branch, before: Branch, stretch: Stretch): Branch => {
  const loss = credible(now.g, stretch) - credible(before.g, stretch)
  return loss < 0 ? { ...now, w: now.w + loss } : now
}

/** A bank that has seen a reading, the log density it gave it, and the best story's z². */
const tell = (
  all: readonly Carried[],
  n: number,
  sight: Sight,
  base_C: number,
  jump: ReturnType<typeof jumpOf>,
  stretch: Stretch,
): Told => {
  let stirred = 0
  const told = all.map((c) => {
    if (c.branch.kind === 'ice') {
      const by = weigh(c.branch, n, sight)
      const branch = seen(c.branch, n, sight, by)
      return { branch: judgedBy(branch, c.branch, stretch), z2: by.z * by.z }
    }
    const { branch, calm, share } = liquidSeen(c, n, sight, base_C, jump)
    stirred = Math.max(stirred, share * Math.exp(c.branch.w))
    return {
      branch: judgedBy(branch, c.branch, stretch),
      z2: calm.z * calm.z * (1 - share) + share,
    }
  })
  const reference = liquidLog(all, told)
  const even = told.map((x, i) => {
    if (reference === null || x.branch.kind !== 'ice') return x
    const before = all[i]!.branch.w
    const gain = x.branch.w - before
    return { ...x, branch: { ...x.branch, w: before + reference + beyond(gain - reference) } }
  })
  const log = sumLogs(even.map((x) => x.branch.w))
  const heaviest = even.reduce((a, b) => (b.branch.w > a.branch.w ? b : a))
  // What stirs the liquid story stirs the others too, so that a poor UA never looks like ice.
  const extra = 0.3 * stirred * jump.size_K ** 2
  const bank = even.map(({ branch }) => {
    if (branch.kind !== 'ice' || extra < 1e-6) return branch
    const g = [...branch.g]
    g[at(n, Δ, Δ)] = g[at(n, Δ, Δ)]! + extra
    return { ...branch, g }
  })
  return { bank: thinned(bank, n), log, z2: heaviest.z2 }
}

/** What the heaviest story expects of a slot, and how sure it is: for runs and returns. */
const expectation = (all: readonly Carried[], n: number, sight: Sight) => {
  const top = all.reduce((a, b) => (b.branch.w > a.branch.w ? b : a)).branch
  const by = weigh(top, n, sight)
  return { expected_C: top.g[sensorOf(sight.slot)]! + top.g[biasOf(sight.slot)]!, ...by }
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
 */
const calledBy = (
  track: ItemTrack,
  t_ms: number,
  trusted: boolean,
  T90_s: number,
  apart_s: number,
  warmAir: boolean,
  settled_z: number,
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
    return { strong, strong_ms, called: { at_ms: t_ms, reckoned: placedAsIce, placedAsIce } }
  }
  return { strong, strong_ms }
}

/** How far a reading is from where a settled probe would stand on the heaviest story with ice. */
const fromPlateau_z = (
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

const committed = (track: ItemTrack, n: number): readonly Branch[] => {
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
/** A drop from the plateau that ice cannot make: beyond what could have frozen through, K. */
const leastDrop_K = 1
const dropMargin = 1.5
const stillSlush = 0.8

/**
 * Does a reading unmake a call? It falls from the plateau faster than ice could have frozen through,
 * and to where the liquid story, which heard nothing since, expects it: the probe was elsewhere.
 */
const unmade = (
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
