import type { Fan, ItemView } from '../../config/schema/api.js'
import type { ItemId, ProbeId } from '../../config/schema/site.js'
import type { Interval, Standing, Verdict } from '../../config/schema/verdict.js'
import { chanceAt, depthFor, followAir, jumpFrom, type Sample } from './fixturePhysics.js'
import { probes, type Spec, type UnitSpec, units } from './fixtureSite.js'

/** 03:25:04 at the invented site. */
export const start_ms = Date.parse('2026-01-05T02:25:04Z')
export const minute_ms = 60_000
export const zone = 'Europe/Paris'

export const u_K: Readonly<Record<Spec['evidence'], number>> = {
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

export type Known = {
  readonly unit: UnitSpec
  readonly spec: Spec
  readonly id: string
  readonly history: readonly Sample[]
}

export const everything: readonly Known[] = units.flatMap((unit) =>
  unit.items.map((spec) => ({
    unit,
    spec,
    id: idOf(unit.id, spec.position),
    history: historyOf(unit, spec),
  })),
)

export const sampleAt = ({ history }: Known, t: number): Sample => {
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

export const fanOf = (known: Known, t: number, u: number): Fan[] =>
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

export const verdictOf = (known: Known, t: number): Verdict => {
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

export const viewOf = (known: Known, t: number): ItemView => {
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
