import type {
  ItemCurves,
  ItemReadings,
  ItemTrail,
  ProbeView,
  StorageUnitView,
} from '../../config/schema/api.js'
import type { ProbeId, StorageUnitId } from '../../config/schema/site.js'
import type { Verdict } from '../../config/schema/verdict.js'
import { chanceAt, curvesOf, jumpFrom, seeded } from './fixturePhysics.js'
import { probes, type UnitSpec, units } from './fixtureSite.js'
import { everything, fanOf, minute_ms, sampleAt, start_ms, u_K, verdictOf } from './fixtureWatch.js'

export const readingOf = (spec: (typeof probes)[number], t: number): number | null => {
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

export const probeView = (spec: (typeof probes)[number], t: number): ProbeView => {
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

export const unitView = (unit: UnitSpec, t: number): StorageUnitView => {
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

export const readingsOf = (
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

export const curves = (id: string, t: number): ItemCurves => {
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

export const trailOf = (id: string, t: number): ItemTrail => {
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
