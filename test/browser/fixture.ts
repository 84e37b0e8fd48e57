import { readFileSync } from 'node:fs'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { join } from 'node:path'
import type {
  CautionRow,
  Changed,
  Fan,
  Intake,
  ItemCurves,
  ItemReadings,
  ItemTrail,
  ItemView,
  ProbeView,
  RefusedView,
  SiteView,
  Snapshot,
  StorageUnitView,
} from '../../config/schema/api.js'
import type { ItemId, ProbeId, StorageUnitId } from '../../config/schema/site.js'
import type { Interval, Standing, Verdict } from '../../config/schema/verdict.js'
import { apiApp } from '../../server/api/app.js'
import { liveFeed } from '../../server/live/feed.js'
import {
  chanceAt,
  curvesOf,
  depthFor,
  followAir,
  jumpFrom,
  type Sample,
  seeded,
} from './fixturePhysics.js'
import { probes, type Spec, type UnitSpec, units } from './fixtureSite.js'
import { rootFolder } from './root.js'

/** 03:25:04 at the invented site. */
export const start_ms = Date.parse('2026-01-05T02:25:04Z')
const minute_ms = 60_000
const zone = 'Europe/Paris'

const u_K: Readonly<Record<Spec['evidence'], number>> = {
  'measured in item': 0.12,
  'measured on item wall': 0.2,
  'measured on witness': 0.17,
  'inferred from neighbour': 0.5,
  'inferred from air': 0.42,
  'inferred from buffer': 0.48,
  'not assessable': 1,
}

export const idOf = (unit: string, position: string): string =>
  `${unit} ${position}`.replaceAll(' ', '-')

const historyOf = (unit: UnitSpec, spec: Spec): readonly Sample[] => {
  const { kind } = spec
  const liquid = { Tf: kind.Tf, water: kind.water }
  const span = { from: -90, until: 80 }
  if (spec.margin !== undefined) {
    const [level, slope] = spec.margin
    return Array.from({ length: (span.until - span.from) * 2 + 1 }, (_, i) => {
      const t = span.from + i / 2
      const ripple = 0.03 * Math.sin(t / 5 + kind.tau)
      return { t, T: kind.Tf + level + slope * t + ripple, ice: 0 }
    })
  }
  const air = unit.air ?? (() => 4)
  const T = unit.id === 'CR-2' ? 4.4 : air(span.from)
  return followAir(liquid, kind.tau, air, { T, ...span }, spec.turns ?? null)
}

type Known = {
  readonly unit: UnitSpec
  readonly spec: Spec
  readonly id: string
  readonly history: readonly Sample[]
}

const everything: readonly Known[] = units.flatMap((unit) =>
  unit.items.map((spec) => ({
    unit,
    spec,
    id: idOf(unit.id, spec.position),
    history: historyOf(unit, spec),
  })),
)

const sampleAt = ({ history }: Known, t: number): Sample => {
  const first = history[0]
  const last = history.at(-1)
  if (first === undefined || last === undefined) throw new Error('an item without a history')
  return history[Math.round((t - first.t) * 2)] ?? (t < first.t ? first : last)
}

const instant = (t: number): string => new Date(start_ms + t * minute_ms).toISOString()

const standingOf = (known: Known, t: number, margin: number, u: number): Standing => {
  const { spec } = known
  if (spec.silent === true) return 'Silent'
  if (spec.turns !== undefined && t >= spec.turns) return 'Turned'
  if (spec.intended === true && known.unit.id === 'FZ-1') return 'Turned'
  if (Math.abs(margin) < 2 * u) return 'Near'
  if (margin > 0) return 'Above'
  const { mass_kg } = spec.kind
  return chanceAt(mass_kg * spec.count, margin, 8, 4) >= 0.5 ? 'Poised' : 'Below'
}

const fanOf = (known: Known, t: number, u: number): Fan[] =>
  Array.from({ length: 17 }, (_, i) => {
    const ahead = i * 2
    const margin = sampleAt(known, t + ahead).T - known.spec.kind.Tf
    const wide = u * 1.3 + ahead * 0.02
    return [start_ms + (t + ahead) * minute_ms, margin - wide, margin, margin + wide] as const
  })

/** Hours until a fan's low, middle and high edges fall through the line. */
const crossingOf = (fan: readonly Fan[], t: number): Interval | null => {
  const at = (k: 1 | 2 | 3): number | null => {
    const hit = fan.find((f) => f[k] <= 0)
    return hit === undefined ? null : Math.max(0, (hit[0] - start_ms) / minute_ms - t) / 60
  }
  const low = at(1)
  if (low === null) return null
  const middle = at(2) ?? low * 2.2 + 0.4
  return [low, middle, at(3) ?? middle * 1.9 + 0.2]
}

const cautionsOf = (known: Known, standing: Standing): string[] => {
  const { spec, unit } = known
  const extra = spec.kind.cautions.filter((key) => key === 'glass' || key === 'adsorbed')
  if (spec.intended === true)
    return [unit.id === 'FZ-1' ? 'intended-frozen' : 'intended-supercooled']
  if (standing === 'Turned') return ['just-turned', ...extra]
  if (standing === 'Silent') return ['state-unknown', ...extra]
  if (standing === 'Below' || standing === 'Poised')
    return [unit.kind === 'tank jacket' ? 'supercooled-tank' : 'supercooled-vial', ...extra]
  return standing === 'Near' ? ['near-line', ...extra] : []
}

const whyOf = (known: Known, standing: Standing, margin: number, before: number): string[] => {
  const { spec, unit } = known
  const line = `${spec.kind.Tf.toFixed(2).replace('-', '−')} °C`
  const K = (x: number) => `${Math.abs(x).toFixed(1)} K`
  switch (standing) {
    case 'Turned':
      return spec.intended === true
        ? ['It is far below its own freezing point and meant to be frozen.']
        : [
            `The witness reading rose by ${K(before)} within a minute and stays at its own freezing point, ${line}.`,
            `The air of ${unit.id} is colder than that, so nothing warmed it but ice.`,
            'A plateau at its own freezing point, in colder air, is ice.',
          ]
    case 'Poised':
      return [
        `It is reckoned ${K(margin)} below its own freezing point, ${line}, and still liquid.`,
        'The chance of turning within 8 h, at its high side, is over the site’s limit.',
      ]
    case 'Below':
      return spec.intended === true
        ? ['It is below its own freezing point and meant to be.']
        : [`It is reckoned ${K(margin)} below its own freezing point, ${line}, and still liquid.`]
    case 'Near':
      return [`Its own freezing point, ${line}, lies within the uncertainty of the estimate.`]
    case 'Above':
      return [`It is clear of its own freezing point, ${line}.`]
    case 'Silent':
      return ['Probe C-31 has not been heard since 02:51, and no other probe bears on it.']
  }
}

const verdictOf = (known: Known, t: number): Verdict => {
  const { spec, unit } = known
  const { kind } = spec
  const now = sampleAt(known, t)
  const silent = spec.silent === true
  const margin = now.T - kind.Tf
  const u = u_K[spec.evidence]
  const standing = standingOf(known, t, margin, u)
  const turned = standing === 'Turned' && spec.intended !== true
  const mass = kind.mass_kg * spec.count
  const below = margin < 0 && !silent && standing !== 'Turned'
  const jump = jumpFrom({ Tf: kind.Tf, water: kind.water }, now.T)
  const before = sampleAt(known, (spec.turns ?? 0) - 0.5).T
  const limit = (reading: number): 'inside' | 'below' | 'above' =>
    kind.label === null || (reading >= kind.label[0] && reading <= kind.label[1])
      ? 'inside'
      : reading < kind.label[0]
        ? 'below'
        : 'above'
  const chance = (horizon_h: number): Interval => [
    chanceAt(mass, margin, horizon_h, 1 / 60),
    chanceAt(mass, margin, horizon_h, 1),
    chanceAt(mass, margin, horizon_h, 40),
  ]
  const past: Interval = below ? [0.0005, 0.02, chanceAt(mass, margin, 0.3, 4)] : [0, 0, 0.001]
  const any = chance(8)
  return {
    t: instant(t),
    item: known.id as ItemId,
    standing,
    phase: silent
      ? 'unknown'
      : turned
        ? 'freezing'
        : standing === 'Turned'
          ? 'frozen'
          : standing === 'Below' || standing === 'Poised'
            ? 'supercooled'
            : 'liquid',
    hasBeenFrozen: standing === 'Turned',
    evidence: spec.evidence,
    evidenceProbes: probes.filter((p) => p.at.startsWith(unit.id)).map((p) => p.id as ProbeId),
    temperature_C: silent ? null : now.T,
    u_K: silent ? null : u,
    freezingPoint_C: kind.Tf,
    freezingPoint_u_K: 0.015,
    margin_K: silent ? null : margin,
    belowProbability: silent ? null : 1 / (1 + Math.exp((1.7 * margin) / u)),
    turned: {
      probability: turned ? 0.9995 : past[1],
      any: turned ? [0.999, 1, 1] : past,
      count: turned ? [1, 1, 40] : [0, 0, below ? 3 : 0],
      earliest: turned ? instant((spec.turns ?? 0) - 0.5) : null,
      latest: turned ? instant(spec.turns ?? 0) : null,
      from_C: turned ? before : null,
      reckoned: false,
    },
    chance: below
      ? {
          horizon_h: 8,
          one: chance(8),
          any,
          low: any[0],
          middle: any[1],
          high: any[2],
          any_1h: chance(1),
          basis:
            'Literature prior only. Nothing has been learned here from this product and container yet: the true figure may lie anywhere in the interval.',
        }
      : null,
    ifItFreezes: below
      ? {
          end_C: jump.end_C,
          firstIce_kg_kg: jump.ice,
          jump_K: jump.end_C - now.T,
          heatNow_kJ: jump.ice * 330 * kind.mass_kg,
          heatToSolid_kJ: (300 - jump.ice * 330) * kind.mass_kg,
          solid_h: [kind.tau * 0.05, kind.tau * 0.08, kind.tau * 0.13],
          settlesAt_kg_kg: null,
          settle_h: null,
          airRise_K: [0, 0.01, 0.02],
          airRise_all_K: [0.2, 0.6, 1.4],
          neighbourRise_K: [0.2, 0.35, 0.6],
        }
      : null,
    crossing: {
      below_h:
        standing === 'Above' || standing === 'Near' ? crossingOf(fanOf(known, t, u), t) : null,
      above_h: null,
    },
    limits: {
      reading_C: silent ? null : now.T + 0.05,
      probe: (probes.find((p) => p.at === `${unit.id} ${spec.position}`)?.id ??
        probes.find((p) => p.at === unit.id)?.id ??
        null) as ProbeId | null,
      label: silent ? 'unknown' : limit(now.T),
      alert: silent ? 'unknown' : limit(now.T),
      action: silent ? 'unknown' : limit(now.T),
    },
    asIntended: spec.intended === true,
    heldBy: null,
    disposition: null,
    harmAssessed: null,
    cautions: cautionsOf(known, standing),
    why: whyOf(known, standing, turned ? 4.7 : margin, before - kind.Tf),
    model: '0.1.0',
    configRevision: 7,
  }
}

/** The minute since which the standing has been what it is at `t`. */
const sinceOf = (known: Known, t: number): number => {
  if (known.spec.silent === true) return -34
  if (known.spec.margin !== undefined) return -88
  const u = u_K[known.spec.evidence]
  const at = (m: number) => standingOf(known, m, sampleAt(known, m).T - known.spec.kind.Tf, u)
  const now = at(t)
  let m = t
  while (m > -90 && at(m - 0.5) === now) m -= 0.5
  return m
}

const viewOf = (known: Known, t: number): ItemView => {
  const { unit, spec, id } = known
  const { kind } = spec
  const mass = kind.mass_kg * spec.count
  const u = u_K[spec.evidence]
  const verdict = verdictOf(known, t)
  return {
    id,
    productName: kind.name,
    productId: kind.id,
    containerName: kind.mass_kg < 0.02 ? 'vial' : kind.mass_kg > 100 ? 'tank' : 'bottle',
    fill_kg: kind.mass_kg,
    count: spec.count,
    lot: `${kind.id.slice(0, 2).toUpperCase()}-${(id.length * 373) % 9000}`,
    storageUnit: unit.id,
    position: spec.position,
    harm: kind.harm,
    label_C: kind.label,
    verdict,
    since_ms: start_ms + sinceOf(known, t) * minute_ms,
    announcedTurned_ms:
      verdict.standing === 'Turned' && spec.intended !== true
        ? start_ms + (spec.turns ?? 0) * minute_ms
        : null,
    track: known.history
      .filter((s) => s.t >= t - 60 && s.t <= t && (s.t * 2) % 2 === 0)
      .map((s) => [start_ms + s.t * minute_ms, s.T - kind.Tf] as const),
    forecast: spec.silent === true ? [] : fanOf(known, t, u),
    poisedIn_h: verdict.standing === 'Below' && spec.intended !== true ? [0.1, 0.17, 0.25] : null,
    tints_K: [depthFor(mass, 0.01), depthFor(mass, 0.1), depthFor(mass, 0.5)],
  }
}

const readingOf = (spec: (typeof probes)[number], t: number): number | null => {
  const known = everything.find((k) => `${k.unit.id} ${k.spec.position}` === spec.at)
  const random = seeded(Math.round(t * 977) + spec.id.charCodeAt(0) * 31 + spec.id.length)
  if (spec.id === 'C-31' && t > -34) return null
  // Nothing was heard from CR-2 for a while: a gap that must stay a gap.
  if (spec.at.startsWith('CR-2') && t > -27 && t < -14) return null
  if (known !== undefined) return sampleAt(known, t).T + 0.02 * random.gauss()
  const unit = units.find((u) => u.id === spec.at)
  if (unit?.air == null) return null
  if (spec.placement === 'in-air') return unit.air(t) + 0.09 * random.gauss()
  let buffer = unit.air(-90)
  for (let m = -90; m <= t; m += 0.5) buffer += ((unit.air(m) - buffer) / 28) * 0.5
  return buffer + 0.03 * random.gauss()
}

const lastHeard = (spec: (typeof probes)[number], t: number): number | null => {
  const every = spec.interval_s / 60
  const phase = (spec.id.charCodeAt(2) % 5) / 10
  for (let m = Math.floor((t - phase) / every) * every + phase; m > -90; m -= every)
    if (m <= t && readingOf(spec, m) !== null) return m
  return null
}

const probeView = (spec: (typeof probes)[number], t: number): ProbeView => {
  const heard = lastHeard(spec, t)
  const known = everything.find((k) => `${k.unit.id} ${k.spec.position}` === spec.at)
  return {
    id: spec.id as ProbeId,
    placement: spec.placement,
    interval_s: spec.interval_s,
    at: known?.id ?? spec.at,
    heard_ms: heard === null ? null : start_ms + heard * minute_ms,
    trusted_ms: heard === null ? null : start_ms + heard * minute_ms,
    reading_C: heard === null ? null : readingOf(spec, heard),
    quality: heard === null ? null : 'good',
    silent: heard === null || (t - heard) * 60 > 3 * spec.interval_s,
    calibrationDue_ms: Date.parse(spec.id === 'T-04' ? '2025-12-01' : '2027-03-20'),
    topic: `tarnfield/${spec.at.toLowerCase().replaceAll(' ', '-')}/${spec.id.toLowerCase()}`,
  }
}

const unitView = (unit: UnitSpec, t: number): StorageUnitView => {
  const spec = probes.find((p) => p.at === unit.id && p.placement === 'in-air')
  const heard = spec === undefined ? null : lastHeard(spec, t)
  return {
    id: unit.id as StorageUnitId,
    name: unit.name,
    kind: unit.kind,
    air_C: spec === undefined || heard === null ? null : readingOf(spec, heard),
    airAt_ms: heard === null ? null : start_ms + heard * minute_ms,
    windows: [],
  }
}

const readingsOf = (
  id: string,
  t: number,
  span: { from_ms: number | null; until_ms: number | null },
): ItemReadings => {
  const known = everything.find((k) => k.id === id)
  if (known === undefined) throw new Error(`no item ${id}`)
  const { kind, evidence } = known.spec
  const from = Math.max(-90, ((span.from_ms ?? 0) - start_ms) / minute_ms)
  const until = Math.min(t, ((span.until_ms ?? start_ms + 80 * minute_ms) - start_ms) / minute_ms)
  const mine = probes.filter(
    (p) => p.at === known.unit.id || p.at === `${known.unit.id} ${known.spec.position}`,
  )
  const u = u_K[evidence]
  const at = (m: number) => start_ms + m * minute_ms
  const fan = fanOf(known, t, u)
  const mass = kind.mass_kg * known.spec.count
  let odds = [0, 0, 0]
  return {
    from_ms: at(from),
    until_ms: at(until),
    probes: mine.map((p) => {
      const points: [number, number | null, string][] = []
      for (let m = Math.ceil(from); m <= until; m += p.interval_s / 60) {
        const value = readingOf(p, m)
        if (value !== null) points.push([at(m), value, 'good'])
      }
      if (p.id === 'W-02') points.push([at(-48.5), 85, 'bad'])
      return {
        probe: p.id,
        placement: p.placement,
        interval_s: p.interval_s,
        offset_K: 0.02,
        points: points.sort((a, b) => a[0] - b[0]),
      }
    }),
    estimate:
      known.spec.silent === true
        ? []
        : known.history
            .filter((s) => s.t >= from && s.t <= until && (s.t * 2) % 2 === 0)
            .map((s) => {
              const unheard = known.unit.id === 'CR-2' && s.t > -27 && s.t < -12
              return [at(s.t), s.T, unheard ? u * 1.9 : u] as const
            }),
    forecast: fan.map(([when, low, middle, high]) => [
      when,
      low + kind.Tf,
      middle + kind.Tf,
      high + kind.Tf,
    ]),
    chance: fan.map(([when, , margin]) => {
      odds = odds.map((sum, i) => sum + chanceAt(mass, margin, 2 / 60, [1 / 60, 1, 40][i] ?? 1))
      const [low, middle, high] = odds.map((sum) => 1 - Math.exp(-sum))
      return [when, low ?? 0, middle ?? 0, high ?? 0] as const
    }),
  }
}

const curves = (id: string, t: number): ItemCurves => {
  const known = everything.find((k) => k.id === id)
  if (known === undefined) throw new Error(`no item ${id}`)
  const { kind, evidence } = known.spec
  const liquid = { Tf: kind.Tf, water: kind.water }
  const c = curvesOf(liquid)
  const now = sampleAt(known, t)
  const jump = jumpFrom(liquid, now.T)
  const solid_C = Math.max(-19, kind.Tf * 10 - 0.3)
  const u = u_K[evidence]
  return {
    freezingPoint_C: kind.Tf,
    liquid: c.liquid,
    equilibrium: c.equilibrium,
    jump:
      now.T < kind.Tf && now.ice === 0
        ? { h_kJ_kg: c.hLiquid(now.T), from_C: now.T, end_C: jump.end_C }
        : null,
    solid90: { h_kJ_kg: c.hFrozen(solid_C), T_C: solid_C },
    stop_C: -21.2,
    budget: [
      { key: 'budget.position', u_K: u * 0.6 },
      { key: 'budget.gradient', u_K: u * 0.7 },
      { key: 'budget.probe', u_K: u * 0.35 },
      { key: 'budget.freezingPoint', u_K: 0.015 },
    ],
  }
}

const trailOf = (id: string, t: number): ItemTrail => {
  const known = everything.find((k) => k.id === id)
  if (known === undefined) return []
  const changes: { m: number; verdict: Verdict }[] = []
  for (let m = -89; m <= t; m += 1) {
    const verdict = verdictOf(known, m)
    if (changes.at(-1)?.verdict.standing !== verdict.standing) changes.push({ m, verdict })
  }
  return changes
    .map(({ m, verdict }) => ({
      t_ms: start_ms + m * minute_ms,
      standing: verdict.standing,
      phase: verdict.phase,
      evidence: verdict.evidence,
      margin_K: verdict.margin_K,
      why: verdict.why,
    }))
    .reverse()
}

const refused: readonly RefusedView[] = [
  {
    receivedAt_ms: start_ms - 5 * minute_ms,
    topic: 'tarnfield/cr-2/a-07',
    payload: '[{"n":"temp","u":"Far","v":24.1}]',
    code: 'unknown-unit',
    field: '[0].u',
    value: 'Far',
    problem: 'SenML has no such unit of temperature',
    remedy: 'send "Cel"; a probe that counts in °F needs unit "degF" in the site file',
  },
  {
    receivedAt_ms: start_ms - 41 * minute_ms,
    topic: 'tarnfield/nowhere/x1',
    payload: '4.2',
    code: 'unknown-topic',
    field: 'topic',
    value: 'tarnfield/nowhere/x1',
    problem: 'no probe of the site file has this topic',
    remedy: 'give a probe this source, or correct the topic at the sender',
  },
]

const cautionTable = (): CautionRow[] =>
  JSON.parse(
    readFileSync(join(rootFolder(), 'config', 'library', 'cautions.json'), 'utf8'),
  ) as CautionRow[]

export type FixtureOptions = {
  /** As many copies of the site as these, for measuring. */
  readonly copies?: number
  readonly practice?: boolean
  /** Only items that ask for nobody. */
  readonly calm?: boolean
  readonly outage?: string | null
}

/** Any item again under another name, in a storage unit of its copy's number. */
const copied = (item: ItemView, copy: number): ItemView =>
  copy === 0
    ? item
    : { ...item, id: `${item.id}-${copy}`, storageUnit: `${item.storageUnit}/${copy}` }

export type Fixture = {
  readonly url: string
  /** Moves the site's clock on and tells every page, as the watch would. */
  advance(minutes: number): void
  /** Sends a batch that leaves out a number: the page must fetch again. */
  skip(): void
  /** How often the whole snapshot was asked for. */
  snapshots(): number
  /** Only these many items in each batch, so that a change rate can be set. */
  change(items: number): void
  close(): Promise<void>
}

/**
 * A server with made-up but sensible data, deterministic to the last digit, behind the program's own
 * routes, headers and feed.
 */
export const startFixture = async (options: FixtureOptions = {}): Promise<Fixture> => {
  const copies = options.copies ?? 1
  let t = 0
  let seq = 0
  let asked = 0
  let speed = 1
  let waiting: Changed | null = null

  const site = (): SiteView => ({
    id: 'tarnfield',
    name: 'Tarnfield Depot',
    zone,
    // A little after the newest figure, as it always is.
    now_ms: start_ms + t * minute_ms + 6_000,
    speed,
    practice: options.practice ?? true,
    tryProbe: {
      topic: 'tarnfield/try/p-99',
      name: 'urn:dev:mac:0024befffe804ff1:temp',
      mqtt: 'mqtt://127.0.0.1:1883',
      item: 'CR-3 shelf A1',
    },
    policy: { poisedChance: 0.05, poisedHorizon_h: 8, chanceQuantile: 'high', lead_min: 30 },
    model: '0.1.0',
  })
  const intake = (): Intake => ({
    readings: 48_210 + Math.round(t * 29),
    duplicates: 12,
    conflicts: 1,
    refused: refused.length,
    bad: 7,
    outage: options.outage ?? null,
    behind_s: 0,
    notEvaluated: [],
  })
  const shown = everything.filter(
    (k) => options.calm !== true || k.unit.id === 'CR-1' || k.unit.id === 'FZ-1',
  )
  const items = (): ItemView[] => {
    const once = shown.map((k) => viewOf(k, t))
    return Array.from({ length: copies }, (_, copy) => once.map((i) => copied(i, copy))).flat()
  }
  const unitViews = (): StorageUnitView[] =>
    Array.from({ length: copies }, (_, copy) =>
      units.map((u) => {
        const view = unitView(u, t)
        return copy === 0 ? view : { ...view, id: `${view.id}/${copy}` as StorageUnitId }
      }),
    ).flat()
  const heard = (): ProbeView[] => probes.map((p) => probeView(p, t))
  const snapshot = (): Snapshot => ({
    seq,
    asOf_ms: start_ms + t * minute_ms,
    site: site(),
    storageUnits: unitViews(),
    items: items(),
    probes: heard(),
    intake: intake(),
  })
  const batch = (changed: readonly ItemView[]): Changed => {
    seq += 1
    const { now_ms } = site()
    return {
      seq,
      asOf_ms: start_ms + t * minute_ms,
      now_ms,
      speed,
      items: changed,
      storageUnits: unitViews(),
      probes: heard(),
      intake: intake(),
    }
  }

  const app = apiApp(
    {
      snapshot: () => {
        asked += 1
        return snapshot()
      },
      readings: async (id, span) => readingsOf(id, t, span),
      trail: (id) => trailOf(id, t),
      curves: async (id) => curves(id, t),
      cautions: cautionTable,
      refused: () => refused,
      setSpeed: (wanted) => {
        speed = wanted
        waiting = batch([])
      },
      health: () => ({ live: true, ready: true, outage: null, behind_s: 0 }),
    },
    join(rootFolder(), 'dist', 'client'),
    { error: (context, text) => console.error(text, context) },
  )
  const server = createServer(app)
  const take = (): Changed | null => {
    const next = waiting
    waiting = null
    return next
  }
  const feed = liveFeed(server, take, () => true)
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  // The cast: a TCP server that listens has an address of this form.
  const { port } = server.address() as AddressInfo
  let all: ItemView[] | null = null
  let cursor = 0
  return {
    url: `http://127.0.0.1:${port}`,
    advance(minutes) {
      t += minutes
      waiting = batch(items())
    },
    skip() {
      seq += 1
      waiting = batch([])
    },
    snapshots: () => asked,
    change(count) {
      all ??= items()
      const from = all
      const some = Array.from({ length: Math.min(count, from.length) }, (_, i) => {
        const item = from[(cursor + i) % from.length]
        if (item === undefined) throw new Error('no items')
        const margin_K =
          item.verdict.margin_K === null ? null : item.verdict.margin_K + 0.3 * Math.sin(cursor + i)
        return { ...item, verdict: { ...item.verdict, margin_K } }
      })
      cursor += count
      waiting = batch(some)
    },
    async close() {
      await feed.close()
      server.closeAllConnections()
      server.close()
    },
  }
}
