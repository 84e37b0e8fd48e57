import { parse } from '../../config/schema/parse.js'
import { ReadingLine, rfc3339 } from '../../config/schema/reading.js'
import { readSite } from '../../config/schema/readSite.js'
import type { SiteFile } from '../../config/schema/site.js'

/**
 * A site through which every situation of the trade's handling cautions is reached: some items stay
 * liquid below their line, some turn, freeze, thaw, warm, fall silent. All of it is invented.
 */

const start_ms = Date.parse('2026-01-05T00:00:00Z')
const hours = 8

/** kJ/(kg K), and kJ per kg of ice: enough for a trace; the watch has the real curves. */
const c = 3.9
const L = 333

type Story = {
  readonly from_C: number
  readonly air_C: (t_h: number) => number
  readonly tau_h: number
  readonly freezing_C: number
  /** When ice forms; null when it never does. A story may also begin frozen. */
  readonly turns_h?: number
  readonly frozen?: true
}

/** Ice of a product that is 0.9 water, kg/kg: an ideal solution on its equilibrium line. */
const ice = (T: number, Tf: number): number => (T >= Tf ? 0 : 0.9 * (1 - Tf / T))

const withIce_C = (h: number, Tf: number): number => {
  let [low, high] = [-250, 60]
  for (let i = 0; i < 60; i++) {
    const mid = (low + high) / 2
    if (c * mid - L * ice(mid, Tf) < h) low = mid
    else high = mid
  }
  return low
}

/** Lumped cooling of enthalpy, read off one branch or the other: the jump needs no code of its own. */
const temperatures = (story: Story): number[] => {
  const step_h = 1 / 240
  let h = c * story.from_C - (story.frozen ? L * ice(story.from_C, story.freezing_C) : 0)
  const out: number[] = []
  for (let i = 0; i <= hours * 240; i++) {
    const t_h = i * step_h
    const solid = story.frozen === true || t_h >= (story.turns_h ?? Number.POSITIVE_INFINITY)
    const T = solid ? withIce_C(h, story.freezing_C) : h / c
    if (i % 4 === 0) out.push(T)
    h += ((story.air_C(t_h) - T) * c * step_h) / story.tau_h
  }
  return out
}

/** A last digit that moves: a probe that never does would be taken for stuck. */
const dither_K = (i: number, probe: number): number =>
  0.03 * Math.sin(12.9898 * i + 78.233 * probe) + 0.02 * Math.sin(3.7 * i * (probe + 1))

const steady = (C: number) => () => C
const then = (first: number, at_h: number, second: number) => (t_h: number) =>
  t_h < at_h ? first : second + (first - second) * Math.exp(-(t_h - at_h) / 0.2)

const saline = (cautions: string[], harm: string) => ({
  freezing: { kind: 'measured', freezingPoint_C: -0.53, u_K: 0.02, water_kg_kg: 0.99 },
  harm,
  nucleation: 'clean-solution',
  cautions,
})
const fish = (harm: string) => ({
  freezing: {
    ...{ kind: 'food', water_kg_kg: 0.8, protein_kg_kg: 0.18, fat_kg_kg: 0.01, ash_kg_kg: 0.01 },
    freezingPoint_C: -1.2,
    u_K: 0.1,
  },
  harm,
  nucleation: 'animal-tissue',
})
const drink = (freezingPoint_C: number, cautions: string[]) => ({
  freezing: { kind: 'measured', freezingPoint_C, u_K: 0.05, water_kg_kg: 0.9 },
  harm: 'freezing',
  nucleation: 'food-liquid',
  cautions,
})

const products = {
  antigen: saline(['glass', 'biological', 'adsorbed'], 'freezing'),
  plasma: saline(['biological'], 'thawing'),
  cells: saline(['liquid-nitrogen', 'biological'], 'thawing'),
  reagent: saline(['dry-ice'], 'thawing'),
  ale: drink(-2.4, ['glass', 'carbonated']),
  juice: drink(-1.3, []),
  fillet: fish('freezing'),
  superchilled: fish('meant-supercooled'),
}

const containers = {
  vial: { fill_kg: 0.01, UA_W_K: 0.036 },
  bag: { fill_kg: 0.3, UA_W_K: 0.3 },
  bottle: { fill_kg: 0.5, UA_W_K: 0.3 },
  box: { fill_kg: 5, UA_W_K: 2.5, sealed: false },
  tank: { fill_kg: 900, UA_W_K: 100, sealed: false },
}

const hour = 3600
const tau_h = (container: keyof typeof containers): number =>
  (containers[container].fill_kg * c * 1000) / containers[container].UA_W_K / hour

type Case = {
  readonly id: string
  readonly product: keyof typeof products
  readonly container: keyof typeof containers
  readonly kind: string
  readonly from_C: number
  readonly air_C: (t_h: number) => number
  readonly turns_h?: number
  readonly frozen?: true
  /** The probe is heard no more. */
  readonly silentFrom_h?: number
}

const cases: readonly Case[] = [
  ...[
    { id: 'vials-below', product: 'antigen', container: 'vial', kind: 'cold room', from_C: 4 },
    { id: 'ale-below', product: 'ale', container: 'bottle', kind: 'cold room', from_C: 2 },
    { id: 'juice-below', product: 'juice', container: 'tank', kind: 'tank jacket', from_C: -1 },
    { id: 'fillets-below', product: 'fillet', container: 'box', kind: 'cold room', from_C: 1 },
    { id: 'bags-still-liquid', product: 'plasma', container: 'bag', kind: 'freezer', from_C: 4 },
  ].map((given) => ({ ...given, air_C: steady(-6) }) as Case),
  {
    ...{ id: 'superchilled', product: 'superchilled', container: 'box', kind: 'cold room' },
    from_C: -2.4,
    air_C: steady(-2.5),
  },
  {
    ...{ id: 'vials-turn', product: 'antigen', container: 'vial', kind: 'freezer' },
    from_C: 4,
    air_C: then(-8, 2, -25),
    turns_h: 1,
  },
  {
    ...{ id: 'vials-thaw', product: 'antigen', container: 'vial', kind: 'refrigerator' },
    from_C: 4,
    air_C: then(-8, 2, 5),
    turns_h: 1,
  },
  {
    ...{ id: 'plasma-warms', product: 'plasma', container: 'vial', kind: 'freezer' },
    from_C: -25,
    air_C: then(-25, 2, 5),
    frozen: true,
  },
  {
    ...{ id: 'reagent-on-dry-ice', product: 'reagent', container: 'bag', kind: 'transport' },
    from_C: -70,
    air_C: steady(-72),
    frozen: true,
  },
  {
    ...{ id: 'cells-in-vapour', product: 'cells', container: 'vial', kind: 'dewar' },
    from_C: -180,
    air_C: steady(-180),
    frozen: true,
  },
  {
    ...{ id: 'unheard', product: 'antigen', container: 'vial', kind: 'refrigerator' },
    from_C: 4,
    air_C: steady(4),
    silentFrom_h: 1,
  },
  {
    ...{ id: 'near', product: 'antigen', container: 'vial', kind: 'refrigerator' },
    from_C: -0.5,
    air_C: steady(-0.55),
  },
]

const story = (given: Case): Story => ({
  from_C: given.from_C,
  air_C: given.air_C,
  tau_h: tau_h(given.container),
  freezing_C: products[given.product].freezing.freezingPoint_C,
  ...(given.turns_h === undefined ? {} : { turns_h: given.turns_h }),
  ...(given.frozen === undefined ? {} : { frozen: given.frozen }),
})

const probe = (id: string, placement: string) => ({
  ...{ id, placement, T90_s: 30, accuracy_K: 0.2, resolution_K: 0.01, interval_s: 60 },
  range_C: [-200, 60],
})

/** Each item alone in a storage unit of its own, with a probe in it and one in the air. */
export const everyCautionSite: SiteFile = readSite({
  format: 'hoarline-site/1',
  site: { id: 'every-caution', name: 'Every caution', zone: 'UTC' },
  products: Object.entries(products).map(([id, product]) => ({ id, name: id, ...product })),
  containers: Object.entries(containers).map(([id, container]) => ({ id, ...container })),
  storageUnits: cases.map(({ id, kind }) => ({ id: `su-${id}`, kind })),
  items: cases.map((given) => ({
    ...{ id: given.id, product: given.product, container: given.container, count: 1 },
    storageUnit: `su-${given.id}`,
    placedAt: rfc3339(start_ms),
    initial_C: given.from_C,
    initial_u_K: 0.5,
    previouslyFrozen: given.frozen === true,
  })),
  probes: cases.flatMap(({ id }) => [probe(`in-${id}`, 'in-item'), probe(`air-${id}`, 'in-air')]),
  assignments: cases.flatMap(({ id }) => [
    { probe: `in-${id}`, to: { item: id }, from: rfc3339(start_ms) },
    { probe: `air-${id}`, to: { storageUnit: `su-${id}` }, from: rfc3339(start_ms) },
  ]),
})

export const everyCautionReadings: readonly ReadingLine[] = cases
  .flatMap((given, n) => {
    const inItem = temperatures(story(given))
    return inItem.flatMap((T, minute) => {
      const t_h = minute / 60
      if (t_h >= (given.silentFrom_h ?? Number.POSITIVE_INFINITY)) return []
      const at = (id: string, celsius: number, k: number) => ({
        probe: `${id}-${given.id}`,
        t: rfc3339(start_ms + minute * 60_000),
        celsius: Math.round((celsius + dither_K(minute, k)) * 100) / 100,
      })
      return [at('in', T, 2 * n), at('air', given.air_C(t_h), 2 * n + 1)]
    })
  })
  .sort((a, b) => (a.t < b.t ? -1 : a.t > b.t ? 1 : 0))
  .map((line) => parse(ReadingLine, line))

export const everyCautionUntil_ms = start_ms + hours * hour * 1000
