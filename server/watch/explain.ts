import { rfc3339 } from '../../config/schema/reading.js'
import type { Policy } from '../../config/schema/site.js'
import type {
  Interval,
  Judgement,
  Phase,
  Standing,
  Verdict,
  Why,
} from '../../config/schema/verdict.js'
import type { View } from './judgement.js'
import { type Plan, valueAt } from './plan.js'

/** Why a verdict is what it is, as keys of config/words/en/why.json and the values they take. */

/** A temperature or a difference as people read it, with a true minus sign. */
const figure = (x: number, digits: number): string => {
  const text = Math.abs(x).toFixed(digits)
  return x < 0 && Number(text) !== 0 ? `−${text}` : text
}
const celsius = (x: number, digits = 1): string => `${figure(x, digits)} °C`
const kelvin = (x: number, digits = 1): string => `${figure(x, digits)} K`

/** Minutes, hours or days, whichever is nearest to a plain number. */
const span = (ms: number): string => {
  const min = ms / 60_000
  if (min < 1.5) return `${Math.max(1, Math.round(ms / 1000))} s`
  if (min < 120) return `${Math.round(min)} min`
  const h = min / 60
  return h < 48 ? `${figure(h, 1)} h` : `${Math.round(h / 24)} days`
}

/** A chance as people read it: never 0 %, never 100 %. */
const percent = (p: number): string =>
  p < 0.001
    ? 'under 0.1 %'
    : p > 0.999
      ? 'over 99.9 %'
      : p < 0.1
        ? `${(100 * p).toFixed(1)} %`
        : `${Math.round(100 * p)} %`

type Said = {
  readonly standing: Standing
  readonly phase: Phase
  readonly asIntended: boolean
  readonly chances: { readonly any: Interval; readonly horizon_h: number } | null
  readonly policy: Policy
}

const evidenceWhy = (plan: Plan, v: View): Why[] => {
  const best = v.evidence[0]
  if (best === undefined) return []
  const probe = plan.probes[best.probe]!.id
  const values = { probe, reading: celsius(best.C, 2) }
  switch (best.evidence) {
    case 'measured in item':
      return [{ key: 'why.inItem', values }]
    case 'measured on item wall':
      return [{ key: 'why.onWall', values }]
    case 'measured on witness':
      return [{ key: 'why.onWitness', values }]
    case 'inferred from neighbour':
      return [{ key: 'why.fromNeighbour', values }]
    case 'inferred from buffer':
      return [{ key: 'why.fromBuffer', values }]
    default:
      return [{ key: 'why.fromAir', values }]
  }
}

const silentWhy = (plan: Plan, v: View, policy: Policy): Why[] => {
  const apart = v.item.slots.flatMap((slot, k): Why[] => {
    const s = v.track.slots[k]!
    if (s.apart_ms < 0) return []
    const values = { probe: plan.probes[slot.probe]!.id, level: celsius(s.level_C, 2) }
    return s.apartWhy === 'stuck'
      ? [{ key: 'why.stuck', values }]
      : s.apartWhy === 'fahrenheit'
        ? [{ key: 'why.fahrenheit', values }]
        : [{ key: 'why.left', values }]
  })
  const last = Math.max(...v.track.slots.map((s) => s.trusted_ms), -1)
  const heard: Why =
    v.best !== 'not assessable'
      ? {
          key: 'why.tooVague',
          values: { u: kelvin(v.estimate.u_K), useful: kelvin(policy.usefulU_K) },
        }
      : last >= 0
        ? { key: 'why.silentSince', values: { span: span(v.now_ms - last) } }
        : { key: 'why.neverHeard', values: {} }
  return [heard, ...apart, { key: 'why.unknownIsNotGood', values: {} }]
}

const turnedWhy = (v: View, phase: Phase): Why[] => {
  const { called, bank } = v.track
  if (called === null) return []
  const still: Why[] =
    v.estimate.icy < 0.5 && v.best !== 'not assessable'
      ? [{ key: 'why.thawedSince', values: {} }]
      : phase === 'thawing'
        ? [{ key: 'why.thawing', values: {} }]
        : []
  if (called.placedAsIce) return [{ key: 'why.placedAsIce', values: {} }, ...still]
  if (called.reckoned) return [{ key: 'why.reckoned', values: {} }, ...still]
  const iced = bank.filter((b) => b.kind !== 'liquid' && !b.placedAsIce)
  if (iced.length === 0) return still
  const top = iced.reduce((a, b) => (b.w > a.w ? b : a))
  const rise: Why = {
    key: v.track.based ? 'why.roseWithAir' : 'why.rose',
    values: {
      jump: kelvin(top.jump_K),
      from: celsius(top.from_C),
      line: celsius(v.matter.freezing_C, 2),
      env: celsius(v.estimate.env_C),
      span: span(Math.max(1000, top.to_ms - top.from_ms)),
    },
  }
  return [rise, { key: 'why.notRecovery', values: {} }, ...still]
}

/** One to five reasons, what matters most first; never more than the evidence bears. */
export function whyOf(plan: Plan, v: View, said: Said): Why[] {
  const { standing, policy } = said
  const { estimate: e, matter } = v
  const margin = Math.abs(e.T_C - matter.freezing_C)
  const figures = {
    T: celsius(e.T_C, 2),
    u: kelvin(e.u_K, 2),
    line: celsius(matter.freezing_C, 2),
    margin: kelvin(margin, 2),
    p: percent(e.below),
  }
  const unseen: Why[] =
    v.best.startsWith('inferred') && e.below > 0.05
      ? [{ key: 'why.iceNotObservable', values: { p: percent(v.p) } }]
      : []
  const witness: Why[] = v.witnessTurned ? [{ key: 'why.witnessTurned', values: {} }] : []
  const interval_s = Math.min(
    ...v.item.slots.map((s) => plan.probes[s.probe]!.given.interval_s),
    Number.POSITIVE_INFINITY,
  )
  const slow: Why[] =
    Number.isFinite(interval_s) &&
    interval_s >= 900 &&
    v.best.startsWith('measured') &&
    e.below > 0.5
      ? [{ key: 'why.slowSampling', values: { interval: span(interval_s * 1000) } }]
      : []
  const doubt: Why[] =
    v.track.fork !== null && v.track.fork.odds > -2
      ? [
          {
            key: 'why.probeInDoubt',
            values: { probe: plan.probes[v.item.slots[v.track.fork.slot]!.probe]!.id },
          },
        ]
      : []
  const intended: Why[] = said.asIntended ? [{ key: 'why.asIntended', values: {} }] : []
  const own = evidenceWhy(plan, v)
  const all = ((): Why[] => {
    switch (standing) {
      case 'Silent':
        return [...silentWhy(plan, v, policy), ...own]
      case 'Turned':
        return [
          ...turnedWhy(v, said.phase),
          ...intended,
          ...doubt,
          ...own,
          ...(own.length === 0 ? silentWhy(plan, v, policy).slice(0, 1) : []),
        ]
      case 'Poised':
      case 'Below': {
        const chance: Why[] =
          said.chances === null
            ? []
            : [
                {
                  key: standing === 'Poised' && !v.witnessTurned ? 'why.poised' : 'why.chance',
                  values: {
                    low: percent(said.chances.any[0]),
                    high: percent(said.chances.any[2]),
                    hours: String(said.chances.horizon_h),
                    limit: percent(policy.poisedChance),
                  },
                },
              ]
        return [
          { key: 'why.below', values: figures },
          ...chance,
          ...witness,
          ...doubt,
          ...intended,
          ...own,
          ...unseen,
          ...slow,
        ]
      }
      case 'Near':
        return [{ key: 'why.near', values: figures }, ...own, ...witness, ...doubt, ...unseen]
      default:
        return [{ key: 'why.above', values: figures }, ...own, ...doubt]
    }
  })()
  const soon =
    valueAt(plan.policy, v.now_ms).lead_min > 0 && all.length === 0
      ? [{ key: 'why.unknownIsNotGood', values: {} }]
      : []
  return [...all, ...soon].slice(0, 5)
}

/** Digits a figure is written with at the borders. */
const significant = 6

const rounded = <T>(value: T): T => {
  if (typeof value === 'number') {
    const r = Number(value.toPrecision(significant))
    return (Object.is(r, -0) ? 0 : r) as T
  }
  if (Array.isArray(value)) return value.map(rounded) as T
  if (typeof value === 'object' && value !== null)
    return Object.fromEntries(Object.entries(value).map(([k, x]) => [k, rounded(x)])) as T
  return value
}

/**
 * A judgement as interfaces show it: its instant written out, its reasons as sentences, its figures
 * to six digits.
 *
 * @param say  of the language it is read in
 */
export function verdictOf(
  judgement: Judgement,
  say: (key: string, values?: Readonly<Record<string, string | number>>) => string,
): Verdict {
  const { t_ms, why, ...rest } = judgement
  return { t: rfc3339(t_ms), ...rounded(rest), why: why.map((w) => say(w.key, w.values)) }
}
