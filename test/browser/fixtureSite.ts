import type { Harm } from '../../config/schema/product.js'
import type { Placement, StorageUnitKind } from '../../config/schema/site.js'
import type { Evidence } from '../../config/schema/verdict.js'

/** An invented site: seven storage units, sixty stored items, all six standings. */

export type Kind = {
  readonly id: string
  readonly name: string
  readonly Tf: number
  readonly water: number
  readonly mass_kg: number
  /** Time constant in moving air, min. */
  readonly tau: number
  readonly harm: Harm
  readonly label: readonly [number, number] | null
  readonly cautions: readonly string[]
}

const kind = (
  id: string,
  name: string,
  Tf: number,
  mass_kg: number,
  tau: number,
  harm: Harm,
  label: readonly [number, number] | null,
  cautions: readonly string[],
  water = 0.985,
): Kind => ({ id, name, Tf, water, mass_kg, tau, harm, label, cautions })

export const kinds = {
  vaccine: kind(
    'vaccine',
    'Adsorbed vaccine, 3 mL',
    -0.53,
    0.003,
    14,
    'freezing',
    [2, 8],
    ['adsorbed', 'glass'],
  ),
  saline: kind('saline-1l', 'Saline 0.9 %, 1 L', -0.53, 1, 120, 'freezing', [2, 25], []),
  salineSmall: kind('saline-100', 'Saline 0.9 %, 100 mL', -0.53, 0.1, 62, 'freezing', [2, 25], []),
  dextrose: kind('dextrose', 'Dextrose 5 %, 500 mL', -0.52, 0.5, 80, 'freezing', [2, 25], []),
  wfi: kind(
    'wfi-10',
    'Water for injections, 10 mL',
    0,
    0.01,
    26,
    'freezing',
    [2, 25],
    ['glass'],
    1,
  ),
  wfiLarge: kind('wfi-100', 'Water for injections, 100 mL', 0, 0.1, 58, 'freezing', [2, 25], [], 1),
  drops: kind('drops', 'Eye drops, 5 mL', -0.55, 0.005, 16, 'freezing', [2, 8], []),
  buffer: kind('buffer-5l', 'Buffer solution, 5 L', -0.3, 5, 260, 'freezing', [2, 8], []),
  irrigation: kind(
    'irrigation',
    'Irrigation fluid, 50 mL',
    -0.5,
    0.05,
    41,
    'freezing',
    [2, 25],
    [],
  ),
  reagent: kind('reagent', 'Reagent R, 250 mL', -1.1, 0.25, 95, 'freezing', [2, 8], ['glass']),
  serum: kind('serum', 'Antiserum, 20 mL', -0.56, 0.02, 30, 'freezing', [2, 8], ['biological']),
  pilsner: kind(
    'pilsner',
    'Pilsner, 2 000 L',
    -2.4,
    2000,
    2000,
    'freezing',
    [-1.5, 2],
    ['carbonated'],
  ),
  juice: kind('juice', 'Apple juice, 2 000 L', -1.42, 2000, 2000, 'freezing', [-1, 3], []),
  fish: kind('fish', 'Whole fish, 20 kg', -1.1, 20, 200, 'meant-supercooled', [-2, -0.5], [], 0.75),
  plasma: kind('plasma', 'Frozen plasma, 250 mL', -0.56, 0.25, 40, 'thawing', [-40, -25], [], 0.92),
} as const

export type Spec = {
  readonly position: string
  readonly kind: Kind
  readonly count: number
  readonly evidence: Evidence
  /** Minute about now at which ice nucleates. */
  readonly turns?: number
  /** Held at this margin (K) with this slope (K/min), as a tank is; else it follows its air. */
  readonly margin?: readonly [number, number]
  readonly silent?: boolean
  readonly intended?: boolean
}

export type UnitSpec = {
  readonly id: string
  readonly name: string
  readonly kind: StorageUnitKind
  /** Air against minutes about now; null where there is none. */
  readonly air: ((t: number) => number) | null
  readonly items: readonly Spec[]
}

const wobble = (level: number, swing: number, period: number) => (t: number) =>
  level + swing * Math.sin(t / period)
const ramp = (from: number, to: number, t0: number, t1: number) => (t: number) =>
  t <= t0 ? from : t >= t1 ? to : from + ((to - from) * (t - t0)) / (t1 - t0)

/** A defrost, and then a valve that stays open: the air falls to −7.6 °C. */
export const coldRoom2 = (t: number): number =>
  t < -46
    ? 4.4
    : t < -34
      ? 4.4 + 4 * Math.sin(((t + 46) / 12) * 1.57)
      : t < -30
        ? 8.4 - 1.5 * (t + 34)
        : t < -16
          ? 2.4 - (10 * (t + 30)) / 14
          : -7.6 + 0.25 * Math.sin(t / 3)

const spec = (
  position: string,
  of: Kind,
  count: number,
  evidence: Evidence,
  more: Partial<Spec> = {},
): Spec => ({ position, kind: of, count, evidence, ...more })

const air = 'inferred from air'
const beside = 'inferred from neighbour'
const inside = 'measured in item'
const witness = 'measured on witness'
const k = kinds

export const units: readonly UnitSpec[] = [
  {
    id: 'CR-1',
    name: 'Cold room 1',
    kind: 'cold room',
    air: wobble(4.6, 0.35, 7),
    items: [
      spec('shelf A1', k.saline, 12, air),
      spec('shelf A2', k.saline, 12, air),
      spec('shelf A3', k.dextrose, 24, air),
      spec('shelf A4', k.dextrose, 24, air),
      spec('shelf B1', k.vaccine, 480, witness),
      spec('shelf B2', k.vaccine, 300, beside),
      spec('shelf B3', k.vaccine, 300, beside),
      spec('shelf B4', k.wfi, 200, air),
      spec('shelf C1', k.drops, 900, air),
      spec('shelf C2', k.drops, 450, 'inferred from buffer'),
      spec('shelf C3', k.buffer, 4, inside),
      spec('shelf C4', k.buffer, 4, beside),
    ],
  },
  {
    id: 'CR-2',
    name: 'Cold room 2',
    kind: 'cold room',
    air: coldRoom2,
    items: [
      spec('shelf A1', k.wfi, 100, air),
      spec('shelf A2', k.saline, 12, air),
      spec('shelf A3', k.salineSmall, 80, air),
      spec('shelf B2', k.vaccine, 360, witness, { turns: -1 }),
      spec('shelf B3', k.vaccine, 240, beside),
      spec('shelf B5', k.vaccine, 120, air),
      spec('shelf C1', k.saline, 12, air),
      spec('shelf C2', k.irrigation, 60, air),
      spec('shelf C4', k.dextrose, 24, air),
      spec('shelf D1', k.buffer, 3, inside),
      spec('shelf D2', k.buffer, 3, beside),
    ],
  },
  {
    id: 'CR-3',
    name: 'Cold room 3',
    kind: 'cold room',
    air: wobble(5.1, 0.3, 8),
    items: [
      spec('shelf A1', k.saline, 12, air),
      spec('shelf A2', k.dextrose, 24, air),
      spec('shelf A3', k.irrigation, 40, air),
      spec('shelf B1', k.vaccine, 240, witness),
      spec('shelf B2', k.vaccine, 240, beside),
      spec('shelf C1', k.serum, 40, air),
      spec('shelf D1', k.reagent, 16, 'measured on item wall'),
      spec('shelf D2', k.serum, 40, 'not assessable', { silent: true }),
    ],
  },
  {
    id: 'FR-2',
    name: 'Refrigerator 2',
    kind: 'refrigerator',
    air: ramp(3.6, -2.4, -34, 6),
    items: [
      spec('shelf 1', k.wfiLarge, 30, air),
      spec('shelf 2', k.saline, 6, air),
      spec('shelf 3', k.reagent, 8, air),
      spec('shelf 4', k.reagent, 8, air),
      spec('shelf 5', k.dextrose, 12, air),
      spec('door 1', k.saline, 4, air),
      spec('door 2', k.salineSmall, 20, air),
    ],
  },
  {
    id: 'TK',
    name: 'Tank cellar',
    kind: 'tank jacket',
    air: null,
    items: [
      spec('TK-1', k.pilsner, 1, inside, { margin: [1.5, 0] }),
      spec('TK-2', k.juice, 1, inside, { margin: [0.21, -0.012] }),
      spec('TK-3', k.pilsner, 1, inside, { margin: [1.1, 0] }),
      spec('TK-4', k.pilsner, 1, inside, { margin: [0.35, 0] }),
      spec('TK-5', k.pilsner, 1, inside, { margin: [1.8, 0.002] }),
    ],
  },
  {
    id: 'SC-1',
    name: 'Superchill room',
    kind: 'cold room',
    air: wobble(-1.9, 0.2, 9),
    items: ['1', '2', '3', '4', '5'].map((n, i) =>
      spec(`rack ${n}`, k.fish, 14 - i, i === 0 ? inside : beside, {
        margin: [-0.5 - 0.12 * i, 0],
        intended: true,
      }),
    ),
  },
  {
    id: 'FZ-1',
    name: 'Plasma freezer',
    kind: 'freezer',
    air: wobble(-28.2, 0.5, 9),
    items: ['A1', 'A2', 'A3', 'B1', 'B2', 'B3', 'C1', 'C2', 'C3', 'D1', 'D2', 'D3'].map((n, i) =>
      spec(`rack ${n}`, k.plasma, 60 - 2 * i, i % 3 === 0 ? inside : air, {
        intended: true,
        margin: [-27.6 - 0.1 * i, 0],
      }),
    ),
  },
]

export type ProbeSpec = {
  readonly id: string
  readonly placement: Placement
  /** `CR-2` or `CR-2 shelf B2`. */
  readonly at: string
  readonly interval_s: number
}

const probe = (id: string, placement: Placement, at: string, interval_s = 60): ProbeSpec => ({
  id,
  placement,
  at,
  interval_s,
})

export const probes: readonly ProbeSpec[] = [
  ...units
    .filter((u) => u.air !== null)
    .map((u, i) => probe(`A-${String(i * 4 + 3).padStart(2, '0')}`, 'in-air', u.id)),
  probe('W-01', 'in-witness', 'CR-1 shelf B1'),
  probe('D-08', 'in-item', 'CR-1 shelf C3'),
  probe('G-02', 'in-buffer', 'CR-1', 300),
  probe('W-02', 'in-witness', 'CR-2 shelf B2'),
  probe('G-05', 'in-buffer', 'CR-2', 300),
  probe('D-09', 'in-item', 'CR-2 shelf D1'),
  probe('W-03', 'in-witness', 'CR-3 shelf B1'),
  probe('S-11', 'on-item-wall', 'CR-3 shelf D1'),
  probe('C-31', 'in-item', 'CR-3 shelf D2'),
  ...['1', '2', '3', '4', '5'].map((n) => probe(`T-0${n}`, 'in-item', `TK TK-${n}`, 30)),
  probe('F-01', 'in-item', 'SC-1 rack 1'),
  ...['A1', 'B1', 'C1', 'D1'].map((n, i) => probe(`Z-0${i + 1}`, 'in-item', `FZ-1 rack ${n}`)),
]
