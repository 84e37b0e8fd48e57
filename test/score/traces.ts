import { bodyOf, type Stuff } from './body.js'

/**
 * Seeded traces with their truth, for scoring the watch: rooms with cycling, defrost and doors, probes
 * with bias, lag, noise and rounding, and the mishaps of the trade. Nothing here is known to server/.
 */

export const random = (seed: number) => {
  let s = seed >>> 0
  const next = () => {
    s = (s + 0x6d2b79f5) >>> 0
    let t = s
    t = Math.imul(t ^ (t >>> 15), t | 1)
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61)
    return ((t ^ (t >>> 14)) >>> 0) / 4294967296
  }
  const normal = () => Math.sqrt(-2 * Math.log(next() + 1e-12)) * Math.cos(2 * Math.PI * next())
  const between = (a: number, b: number) => a + (b - a) * next()
  const pick = <T>(list: readonly T[]): T => list[Math.floor(next() * list.length)]!
  return { next, normal, between, pick }
}

const products = {
  saline: { f: -0.53, u: 0.02, w: 0.99, b: 0, cp: -2.7, nucleation: 'clean-solution' },
  dextrose: { f: -0.54, u: 0.02, w: 0.95, b: 0, cp: 1.4, nucleation: 'clean-solution' },
  plasma: { f: -0.54, u: 0.015, w: 0.93, b: 0, cp: 1.4, nucleation: 'suspension' },
  juice: { f: -1.3, u: 0.15, w: 0.88, b: 0, cp: 1.4, nucleation: 'food-liquid' },
  milk: { f: -0.53, u: 0.02, w: 0.87, b: 0, cp: 1.5, nucleation: 'dairy' },
  beef: { f: -1.7, u: 0.3, w: 0.72, b: 0.08, cp: 1.9, nucleation: 'animal-tissue' },
  water: { f: -0.01, u: 0.01, w: 1, b: 0, cp: 1.4, nucleation: 'tap-water' },
} as const
const containers = {
  'vial-3': { fill: 0.003, r: 0.008, wall: 0.004, UA: 0.012 },
  'vial-10': { fill: 0.01, r: 0.011, wall: 0.009, UA: 0.02 },
  'bottle-100': { fill: 0.1, r: 0.022, wall: 0.055, UA: 0.085 },
  'bottle-1000': { fill: 1, r: 0.042, wall: 0.3, UA: 0.45 },
  'can-5000': { fill: 5, r: 0.085, wall: 0.8, UA: 1.3 },
} as const

export type Placement = 'in-item' | 'on-item-wall' | 'in-witness' | 'in-buffer' | 'in-air'
export type Kind =
  | 'turn'
  | 'quiet'
  | 'rewarm'
  | 'defrost'
  | 'iced'
  | 'pulled'
  | 'swapped'
  | 'stuck'
  | 'codes'
  | 'fahrenheit'
  | 'silent'
  | 'late'
  | 'frozen'
  | 'thaw'
  | 'turn-thaw'

export type Case = {
  readonly name: string
  readonly kind: Kind
  readonly placement: Placement
  readonly withAir: boolean
  readonly hours: number
  readonly site: unknown
  readonly lines: readonly string[]
  readonly start_ms: number
  readonly until_ms: number
  readonly truth: Truth
}
export type Truth = {
  readonly every_s: number
  readonly T_C: readonly number[]
  readonly ice: readonly number[]
  readonly freezing_C: number
  readonly turned_s: number | null
  readonly depth_K: number
  readonly jump_K: number
  readonly tolerance_s: number
  readonly silent: readonly (readonly [number, number])[]
  readonly startsFrozen: boolean
}

type Sensor = { tau: number; bias: number; noise: number; res: number; s: number }
const readSensor = (p: Sensor, target: number, dt: number) => {
  p.s += (target - p.s) * (1 - Math.exp(-dt / p.tau))
}

/** One trace of one item. @param seed decides everything that is left open */
export const trace = (
  seed: number,
  kind: Kind,
  placement: Placement,
  withAir: boolean,
  fixed: { interval_s?: number; hours?: number } = {},
): Case => {
  const g = random(seed)
  const productId = g.pick(Object.keys(products)) as keyof typeof products
  const p = products[productId]
  const small =
    p.nucleation === 'animal-tissue' ? ['bottle-1000', 'can-5000'] : Object.keys(containers)
  const containerId = g.pick(small) as keyof typeof containers
  const c = containers[containerId]
  const T90 = placement === 'in-buffer' ? g.between(1800, 4500) : g.pick([20, 60, 90, 180])
  const interval = fixed.interval_s ?? g.pick([10, 60, 60, 60, 120, 120, 300, 600])
  const accuracy = g.pick([0.2, 0.2, 0.3, 0.5])
  const hours = fixed.hours ?? 24
  const frozenStart = kind === 'frozen' || kind === 'thaw'
  const freezing_C = Math.min(-0.002, p.f + p.u * g.between(-1.5, 1.5))
  const stuff: Stuff = { freezing_C, water_kg_kg: p.w, bound_kg_kg: p.b, other_cp: p.cp }
  const UA = c.UA * g.between(0.75, 1.3)
  const δ = g.normal() * 0.5
  const start_C = frozenStart ? -20 : 5
  const body = bodyOf(stuff, c.fill, c.wall, UA, c.r, start_C, frozenStart)
  // Room: warm first, then cold, then perhaps warm again.
  const depth = g.between(2.5, 9)
  const coldFrom = g.between(0.5, 2) * 3600
  const tau = ((c.fill * 4200 + c.wall * 1000) / UA) * 1.2
  const warmAgain =
    kind === 'rewarm' || kind === 'turn-thaw'
      ? hours * 3600 * g.between(0.6, 0.7)
      : Number.POSITIVE_INFINITY
  const level = (t: number) =>
    frozenStart
      ? kind === 'thaw' && t > hours * 900
        ? 5
        : -20
      : t < coldFrom || t > warmAgain
        ? 4
        : freezing_C - depth
  const cycleAmp = g.between(0.1, 0.6)
  const cycle = g.between(400, 900)
  const defrosts = kind === 'defrost' || g.next() < 0.25
  const doorEvery =
    kind === 'quiet' || g.next() < 0.5 ? g.between(2, 6) * 3600 : Number.POSITIVE_INFINITY
  const wantsTurn = kind === 'turn' || kind === 'turn-thaw' || (kind === 'late' && g.next() < 0.6)
  const turnAfter = coldFrom + Math.min(hours * 3600 * 0.4, tau * g.between(0.9, 2.2))
  const mishapFrom = g.between(0.35, 0.5) * hours * 3600
  const mishapTo = mishapFrom + g.between(1.5, 5) * 3600
  const probe: Sensor = {
    tau: T90 / Math.LN10,
    bias: g.between(-accuracy, accuracy),
    noise: g.between(0.02, 0.06),
    res: g.pick([0.01, 0.05, 0.1]),
    s: start_C,
  }
  const airProbe: Sensor = {
    tau: 90 / Math.LN10,
    bias: g.between(-0.2, 0.2),
    noise: 0.03,
    res: 0.05,
    s: level(0),
  }
  const a = g.between(0.6, 0.82)
  const start_ms = Date.parse('2026-02-03T00:00:00Z')
  const lines: { at: number; text: string }[] = []
  const T_C: number[] = []
  const ice: number[] = []
  const every_s = 300
  let air = level(0)
  let wobble = 0
  let turned_s: number | null = null
  let turnDepth = 0
  let jump_K = 0
  let seq = 0
  let airSeq = 0
  let stuckAt: number | null = null
  let _elsewhere = 0
  const dt = 5
  const phase = Math.floor(g.next() * interval)
  const airInterval = Math.max(interval, 60)
  const airPhase = Math.floor(g.next() * airInterval)
  const swapLevel = g.between(-3, 3)
  const say = (id: string, t: number, y: number, n: number, receivedAfter = 2) => {
    const at = t + receivedAfter
    lines.push({
      at,
      text: JSON.stringify({
        probe: id,
        t: new Date(start_ms + t * 1000).toISOString(),
        receivedAt: new Date(start_ms + at * 1000).toISOString(),
        celsius: Math.round(y * 1000) / 1000,
        seq: n,
      }),
    })
  }
  for (let t = 0; t < hours * 3600; t += dt) {
    if (t % every_s === 0) {
      T_C.push(body.mean_C())
      ice.push(body.ice())
    }
    wobble = wobble * 0.998 + g.normal() * 0.01
    const inDefrost = defrosts && t % 21600 < 1440 && t > 3600
    const inDoor = t % doorEvery > doorEvery - 240
    const goal =
      level(t) +
      cycleAmp * Math.sin((2 * Math.PI * t) / cycle) +
      (inDefrost ? 9 : 0) +
      (inDoor ? 7 : 0)
    air += (goal - air) * (1 - Math.exp(-dt / 150)) + wobble * 0.02
    body.step(air + δ, dt)
    if (wantsTurn && turned_s === null && t > turnAfter && freezing_C - body.mean_C() > 0.8) {
      turned_s = t
      turnDepth = freezing_C - body.mean_C()
      const before = body.mean_C()
      body.turn()
      jump_K = body.mean_C() - before
    }
    const inMishap = t >= mishapFrom && t < mishapTo
    const touch =
      placement === 'on-item-wall'
        ? a * body.wall_C() + (1 - a) * air
        : placement === 'in-buffer' || placement === 'in-air'
          ? air
          : (body.mean_C() + body.centre_C()) / 2
    let target = touch
    if (inMishap && kind === 'iced') target = 0
    if (inMishap && kind === 'pulled') target = 19 + wobble
    if (inMishap && kind === 'swapped') target = swapLevel + 0.3 * Math.sin(t / 2000)
    readSensor(probe, target, dt)
    readSensor(airProbe, air, dt)
    if (t % interval === phase - (phase % dt)) {
      let y = Math.round((probe.s + probe.bias + g.normal() * probe.noise) / probe.res) * probe.res
      if (kind === 'iced' && inMishap)
        y = Math.round((probe.s + probe.bias * 0.2 + g.normal() * 0.01) / probe.res) * probe.res
      if (kind === 'stuck' && inMishap) y = stuckAt ??= y
      if (kind === 'codes' && inMishap) y = g.pick([85, -127, y, y])
      if (kind === 'fahrenheit' && inMishap) y = 1.8 * y + 32
      _elsewhere += 1
      const missing = (kind === 'silent' && inMishap) || g.next() < 0.01
      seq += 1
      if (missing) continue
      const late = kind === 'late' && inMishap
      say('P', t, y, seq, late ? mishapTo - t + 5 : 2)
      if (kind === 'late' && g.next() < 0.05) say('P', t, y, seq, 9)
      if (kind === 'late' && g.next() < 0.02) say('P', t, y + 1, seq, 11)
    }
    if (withAir && t % airInterval === airPhase - (airPhase % dt)) {
      airSeq += 1
      say(
        'A',
        t,
        Math.round((airProbe.s + airProbe.bias + g.normal() * 0.03) / 0.05) * 0.05,
        airSeq,
        3,
      )
    }
  }
  lines.sort((x, y) => x.at - y.at)
  const iso = (t: number) => new Date(start_ms + t * 1000).toISOString()
  const common = {
    role: 'monitor',
    accuracy_K: accuracy,
    resolution_K: probe.res,
    range_C: [-50, 60],
    calibration: { offset_K: 0, u_K: 0.05 },
    faultCodes_C: [85, -127],
  }
  const untouched = [
    'silent',
    'iced',
    'pulled',
    'swapped',
    'stuck',
    'codes',
    'fahrenheit',
  ].includes(kind)
  return {
    name: `${kind}/${placement}${withAir ? '+air' : ''}/${productId}/${containerId}/${interval}s/#${seed}`,
    kind,
    placement,
    withAir,
    hours,
    start_ms,
    until_ms: start_ms + hours * 3600_000,
    lines: lines.map((l) => l.text),
    truth: {
      every_s,
      T_C,
      ice,
      freezing_C,
      turned_s,
      depth_K: turnDepth,
      jump_K,
      tolerance_s: Math.max(3 * interval, 3 * T90, 600),
      silent:
        untouched && !withAir && kind !== 'codes' && placement !== 'in-buffer'
          ? [[mishapFrom + 3 * interval, mishapTo - interval]]
          : [],
      startsFrozen: frozenStart,
    },
    site: {
      format: 'hoarline-site/1',
      site: { id: 's', name: 's', zone: 'UTC' },
      products: [
        {
          id: productId,
          name: productId,
          source: 'score',
          approvedBy: 'score',
          harm: frozenStart ? 'thawing' : 'freezing',
          nucleation: p.nucleation,
          freezing: {
            kind: 'measured',
            freezingPoint_C: p.f,
            u_K: p.u,
            water_kg_kg: p.w,
            bound_kg_kg: p.b,
          },
          liquidOther_cp_kJ_kgK: p.cp,
        },
      ],
      containers: [
        {
          id: containerId,
          fill_kg: c.fill,
          shape: 'cylinder',
          radius_m: c.r,
          height_m: c.fill / 1000 / (Math.PI * c.r ** 2),
          wall_kJ_K: c.wall,
          UA_W_K: c.UA,
          UA_relU: 0.3,
          sealed: true,
        },
      ],
      storageUnits: [
        { id: 'U', name: 'U', kind: frozenStart ? 'freezer' : 'cold room', ambient_C: 20 },
      ],
      items: [
        {
          id: 'X',
          product: productId,
          container: containerId,
          count: 1,
          storageUnit: 'U',
          placedAt: iso(0),
          initial_C: start_C,
          initial_u_K: 0.5,
        },
      ],
      probes: [
        { id: 'P', placement, T90_s: T90, interval_s: interval, ...common },
        ...(withAir
          ? [
              {
                id: 'A',
                placement: 'in-air',
                T90_s: 90,
                interval_s: airInterval,
                ...common,
                accuracy_K: 0.2,
                resolution_K: 0.05,
              },
            ]
          : []),
      ],
      assignments: [
        {
          probe: 'P',
          to:
            placement === 'in-buffer' || placement === 'in-air'
              ? { storageUnit: 'U' }
              : { item: 'X' },
          from: iso(0),
        },
        ...(withAir ? [{ probe: 'A', to: { storageUnit: 'U' }, from: iso(0) }] : []),
      ],
    },
  }
}
