import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { hEquilibrium, hLiquid, ice_kg_kg } from '../../server/physics/curves.js'
import { jump } from '../../server/physics/jump.js'
import seawater from '../reference/seawater.json' with { type: 'json' }
import { assorted, measured, osmolality, saline_kg_kg, solution, water } from './table.js'

describe('seawater against TEOS-10 (python3-gsw, frazil_properties; reference/seawater.py)', () => {
  // Sea salt as a measured freezing point; −2.9 kJ/(kg K) from gsw's own heat capacities.
  const sea = (row: { freezingPoint_C: number; salinity_g_kg: number }) =>
    measured(row.freezingPoint_C, 1 - row.salinity_g_kg / 1000, 0, { liquidOther_cp_kJ_kgK: -2.9 })

  test('the apparent heat capacity of sea salt lies between −2 and −3.5 kJ/(kg K)', () => {
    const [fresh, , ocean] = seawater.cp as { cp_J_kgK: number }[]
    const salt = (ocean!.cp_J_kgK - (1 - 0.035) * fresh!.cp_J_kgK) / 0.035 / 1000
    expect(salt).toBeGreaterThan(-3.5)
    expect(salt).toBeLessThan(-2)
  })

  test.each(seawater.jumps.filter((row) => row.salinity_g_kg === 35))(
    'standard ocean water from $from_C °C: ice within 0.2 %, 1 mK in situ',
    (row) => {
      const { end_C, firstIce_kg_kg } = jump(sea(row), 0, row.from_C)
      expect(Math.abs(firstIce_kg_kg / row.ice_kg_kg - 1)).toBeLessThan(2e-3)
      expect(Math.abs(end_C - row.end_C)).toBeLessThan(1e-3)
    },
  )

  test.each(seawater.jumps.filter((row) => row.salinity_g_kg !== 35))(
    '$salinity_g_kg g/kg from $from_C °C',
    (row) => {
      const { end_C, firstIce_kg_kg } = jump(sea(row), 0, row.from_C)
      // An ideal osmotic solute: at twice the ocean's salt its freezing line bends by itself.
      const salty = row.salinity_g_kg > 40
      expect(Math.abs(firstIce_kg_kg / row.ice_kg_kg - 1)).toBeLessThan(salty ? 2e-2 : 2e-3)
      expect(Math.abs(end_C - row.end_C)).toBeLessThan(salty ? 2e-2 : 1e-3)
    },
  )
})

describe('the same equations by a second program', () => {
  const rows = [
    {
      of: 'saline',
      s: solution({ NaCl: saline_kg_kg }),
      ends: [
        [-4, -0.5492, 0.0433],
        [-6, -0.5641, 0.0683],
        [-8, -0.5799, 0.0933],
        [-10, -0.5966, 0.1184],
        [-15, -0.6433, 0.1817],
      ],
    },
    {
      of: 'saline, 1.3',
      s: solution({ NaCl: saline_kg_kg }, { liquidOther_cp_kJ_kgK: 1.3 }),
      ends: [
        [-4, -0.5494, 0.0436],
        [-10, -0.5973, 0.1194],
        [-15, -0.6445, 0.1833],
      ],
    },
    {
      of: 'plasma',
      s: { ...osmolality(0.29, 0.93), otherCp_kJ_kgK: 1.3 },
      ends: [
        [-4, -0.563, 0.0416],
        [-10, -0.613, 0.1142],
        [-15, -0.663, 0.1752],
      ],
    },
    {
      of: 'milk',
      s: measured(-0.522, 0.87, 0, { liquidOther_cp_kJ_kgK: 1.3 }),
      ends: [
        [-4, -0.547, 0.04],
        [-10, -0.597, 0.1093],
        [-15, -0.647, 0.1677],
      ],
    },
    {
      of: 'sucrose 10 %',
      s: solution({ sucrose: 0.1 }, { liquidOther_cp_kJ_kgK: 1.3 }),
      ends: [
        [-4, -0.651, 0.0397],
        [-10, -0.712, 0.1106],
        [-15, -0.773, 0.1702],
      ],
    },
    {
      of: 'NaCl 10 %',
      s: solution({ NaCl: 0.1 }, { liquidOther_cp_kJ_kgK: -2 }),
      ends: [
        [-8, -6.6736, 0.0151],
        [-10, -6.8443, 0.036],
        [-15, -7.3157, 0.0886],
      ],
    },
    {
      of: 'glycerol 20 %',
      s: solution({ glycerol: 0.2 }),
      ends: [
        [-6, -5.502, 0.006],
        [-10, -5.85, 0.0503],
        [-15, -6.35, 0.1057],
      ],
    },
    {
      of: 'beef',
      s: assorted.beef!,
      ends: [
        [-4, -1.768, 0.0239],
        [-10, -1.975, 0.0864],
        [-15, -2.19, 0.1387],
      ],
    },
  ] as const
  const flat = rows.flatMap(({ of, s, ends }) =>
    ends.map(([from_C, end_C, ice]) => ({ of, s, from_C, end_C, ice })),
  )

  test.each(flat)('$of from $from_C °C: ends at $end_C with $ice', ({ s, from_C, end_C, ice }) => {
    const j = jump(s, 0, from_C)
    expect(Math.abs(j.end_C - end_C)).toBeLessThan(1.1e-3)
    expect(Math.abs(j.firstIce_kg_kg - ice)).toBeLessThan(2.1e-4)
  })

  test('the glass of a vial takes part: 0.8 kJ/K per kg turn 0.119 of ice into 0.142', () => {
    const s = solution({ NaCl: saline_kg_kg }, { liquidOther_cp_kJ_kgK: 1.3 })
    expect(Math.abs(jump(s, 0.8, -10).firstIce_kg_kg - 0.1419)).toBeLessThan(2e-4)
    expect(Math.abs(jump(s, 0.8, -10).end_C + 0.613)).toBeLessThan(1e-3)
  })
})

test.each([
  // [h_l(T_m) − h_l(T_n)]/L by python3-iapws
  { from_C: -1, ice: 0.0127 },
  { from_C: -5, ice: 0.0635 },
  { from_C: -10, ice: 0.1273 },
  { from_C: -15, ice: 0.1918 },
  { from_C: -20, ice: 0.2573 },
  { from_C: -30, ice: 0.394 },
  { from_C: -38, ice: 0.52 },
])('pure water from $from_C °C: $ice ice, at the melting point', ({ from_C, ice }) => {
  const j = jump(water, 0, from_C)
  expect(Math.abs(j.firstIce_kg_kg - ice)).toBeLessThan(5e-4)
  expect(j.end_C).toBe(water.freezingPoint_C)
})

test('an ideal solute with constant heat capacities jumps as the closed form says', () => {
  // Deck, Ochsenbein and Mazzotti 2022, Int. J. Pharm. 613, 121276: 5 % sucrose from −5 and −10 °C.
  // Their constants differ from ours by about 1 %, hence the width.
  const s = measured(-0.28491, 0.95, 0)
  for (const [from_C, σ, end_C] of [
    [-5, 0.059879, -0.30306],
    [-10, 0.123342, -0.325],
  ] as const) {
    const j = jump(s, 0, from_C)
    expect(Math.abs(j.firstIce_kg_kg / 0.95 / σ - 1)).toBeLessThan(0.02)
    expect(Math.abs(j.end_C - end_C)).toBeLessThan(3e-3)
  }
})

describe('mannitol in a freeze-dryer vial (public run log of 4 June 2024, MIT licence)', () => {
  test('from −6.3 °C the model ends at −0.57 ± 0.05 °C, the thermocouple at −0.9', () => {
    const j = jump(solution({ mannitol: 0.0492 }), 0.003 / 0.00305, -6.3)
    expect(Math.abs(j.end_C + 0.57)).toBeLessThan(0.05)
    expect(Math.abs(j.jump_K - 5.7)).toBeLessThan(0.5)
    expect(Math.abs(j.end_C + 0.9)).toBeLessThan(0.5)
  })
})

const any = fc.constantFrom(...Object.values(assorted))
const from = fc.double({ min: -40, max: 10, noNaN: true })
const walls = fc.double({ min: 0, max: 2, noNaN: true })

test('law: enthalpy is conserved, nothing ends above its freezing point, ice stays in bounds', () => {
  fc.assert(
    fc.property(any, walls, from, (s, wall, from_C) => {
      const j = jump(s, wall, from_C)
      if (from_C >= s.freezingPoint_C) {
        expect(j).toMatchObject({ end_C: from_C, jump_K: 0, firstIce_kg_kg: 0, heatNow_kJ_kg: 0 })
        return
      }
      expect(j.end_C).toBeLessThanOrEqual(s.freezingPoint_C)
      expect(j.end_C).toBeGreaterThanOrEqual(from_C)
      expect(j.firstIce_kg_kg).toBeGreaterThanOrEqual(0)
      expect(j.firstIce_kg_kg).toBeLessThanOrEqual(s.water_kg_kg - s.bound_kg_kg)
      const before = hLiquid(s, from_C) + wall * from_C
      // Ice is counted by its own heat, so plateaus hold too.
      const after =
        hLiquid(s, j.end_C) + wall * j.end_C - j.firstIce_kg_kg * j.latentHeatAtEnd_kJ_kg
      expect(after).toBeCloseTo(before, 8)
      expect(j.heatNow_kJ_kg).toBeCloseTo(j.firstIce_kg_kg * j.latentHeatAtEnd_kJ_kg, 12)
    }),
    { numRuns: 1000 },
  )
})

test('law: the deeper it stands, the more ice and the colder the end', () => {
  fc.assert(
    fc.property(any, walls, from, from, (s, wall, a, b) => {
      const [deep, shallow] = [Math.min(a, b), Math.max(a, b)]
      fc.pre(shallow < s.freezingPoint_C && deep < shallow)
      expect(jump(s, wall, deep).firstIce_kg_kg).toBeGreaterThanOrEqual(
        jump(s, wall, shallow).firstIce_kg_kg,
      )
      expect(jump(s, wall, deep).end_C).toBeLessThanOrEqual(jump(s, wall, shallow).end_C)
    }),
  )
})

test('law: the end lies on the equilibrium branch', () => {
  fc.assert(
    fc.property(from, walls, (from_C, wall) => {
      const s = assorted.saline!
      fc.pre(from_C < s.freezingPoint_C)
      const j = jump(s, wall, from_C)
      expect(ice_kg_kg(s, j.end_C)).toBeCloseTo(j.firstIce_kg_kg, 10)
      expect(hEquilibrium(s, j.end_C) + wall * j.end_C).toBeCloseTo(j.h_kJ_kg, 8)
    }),
  )
})

test.each([-40.1, 60.1, Number.NaN])(
  'it refuses to start from %d °C, and names the range',
  (from_C) => {
    expect(() => jump(water, 0, from_C)).toThrow(
      expect.objectContaining({ field: 'from_C', problem: expect.stringContaining('-40 to 60') }),
    )
  },
)
