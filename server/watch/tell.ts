import { biasOf, sensorOf, Δ } from './estimate.js'
import { at } from './gauss.js'
import {
  type Carried,
  credible,
  liquidSeen,
  type Sight,
  type Stretch,
  seen,
  sumLogs,
  thinned,
  weigh,
} from './rivals.js'
import type { Branch } from './state.js'
import type { jumpOf } from './surroundings.js'

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
export const tell = (
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
export const expectation = (all: readonly Carried[], n: number, sight: Sight) => {
  const top = all.reduce((a, b) => (b.branch.w > a.branch.w ? b : a)).branch
  const by = weigh(top, n, sight)
  return { expected_C: top.g[sensorOf(sight.slot)]! + top.g[biasOf(sight.slot)]!, ...by }
}
