import { plateauAtFreezing_kg_kg, plateauAtStop_kg_kg } from './branches.js'
import { coldestFrozen_C, coldestLiquid_C, warmest_C } from './constants.js'
import {
  cEquilibrium,
  cLiquid,
  endOfFreezing_C,
  hEquilibrium,
  hLiquid,
  mostIce_kg_kg,
} from './curves.js'
import { equilibriumTemperature_C } from './equilibrium.js'
import { fusionAt } from './fusion.js'
import { type Exposure, hazard_h, type Kinetics } from './nucleation.js'
import type { Substance } from './substance.js'

/**
 * The two branches as tables for the hot path: T(h) by cubic Hermite pieces, wall included. Cells
 * are short where the curve bends: at most 1.5 kJ/kg and 0.5 K. No allocation in a look-up.
 *
 * Held to `branches.ts` by a test: from 0.001 osmol/kg up temperatures within 0.5 mK, ice within
 * 5e-6 kg/kg, apparent heat capacities within 0.5 %. Purer water turns the corner of its plateau
 * more sharply: 5 mK, 5e-5 kg/kg and 5 %.
 */
type Table = {
  /** Per cell: lower end, length, temperature there, its rise, slopes × length at both ends. */
  readonly h: Float64Array
  readonly dh: Float64Array
  readonly T: Float64Array
  readonly dT: Float64Array
  readonly m0: Float64Array
  readonly m1: Float64Array
  /** First cell of each of so many even stretches of enthalpy. */
  readonly first: Int32Array
  readonly low_kJ_kg: number
  readonly perStretch: number
}

export type Fast = {
  readonly substance: Substance
  readonly wall_kJ_kgK: number
  /** Enthalpy of the liquid at its freezing point, wall included. */
  readonly hFreezing_kJ_kg: number
  readonly liquid: Table
  readonly onIce: Table
  readonly mostIce_kg_kg: number
}

const mostHeat_kJ_kg = 1.5
const mostStep_K = 0.5
/** A march over 260 K and 700 kJ/kg has some 1,000 cells; more is a mistake of this file. */
const mostCells = 20_000
const stretches = 1024
/** How many times steeper a cell may be at its cold end than at its warm one. */
const sharpest = 1.12

/** Ends of cells from warm to cold. */
type Cell = {
  readonly warm: { readonly h: number; readonly T: number; readonly slope: number }
  readonly cold: { readonly h: number; readonly T: number; readonly slope: number }
}

/** Cells along a smooth stretch of a branch, from warm to cold. */
const march = (
  warm_C: number,
  cold_C: number,
  h: (t: number) => number,
  c: (t: number) => number,
): Cell[] => {
  const cells: Cell[] = []
  // Heat capacities just inside the stretch: at its ends they may belong to the next one.
  const inside = (t: number) => {
    const edge = (warm_C - cold_C) * 1e-9
    return c(Math.min(warm_C - edge, Math.max(cold_C + edge, t)))
  }
  let warm = { h: h(warm_C), T: warm_C, slope: 1 / inside(warm_C) }
  while (warm.T > cold_C) {
    let step = Math.min(mostStep_K, mostHeat_kJ_kg * warm.slope)
    let T = warm.T - step > cold_C + step / 4 ? warm.T - step : cold_C
    // Where a very dilute product leaves its plateau the curve turns within a fraction of a cell.
    while (step > 1e-9 && warm.slope * sharpest < 1 / inside(T)) {
      step /= 2
      T = Math.max(cold_C, warm.T - step)
    }
    const cold = { h: h(T), T, slope: 1 / inside(T) }
    cells.push({ warm, cold })
    if (cells.length > mostCells) throw new Error('a branch has more cells than it can have')
    warm = cold
  }
  return cells
}

const plateau = (T: number, fromH: number, heat: number): Cell[] =>
  heat > 0 ? [{ warm: { h: fromH, T, slope: 0 }, cold: { h: fromH - heat, T, slope: 0 } }] : []

/** Slopes of a cell bounded so that the cubic never turns back (Fritsch and Carlson 1980). */
const bounded = (m: number, rise: number): number => Math.min(Math.max(m, 0), 3 * rise)

const tableFrom = (fromWarm: readonly Cell[]): Table => {
  const cells = [...fromWarm].reverse()
  const n = cells.length
  const [h, dh, T, dT, m0, m1] = Array.from({ length: 6 }, () => new Float64Array(n)) as [
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
  ]
  cells.forEach(({ warm, cold }, i) => {
    h[i] = cold.h
    dh[i] = warm.h - cold.h
    T[i] = cold.T
    dT[i] = warm.T - cold.T
    m0[i] = bounded(cold.slope * dh[i]!, dT[i]!)
    m1[i] = bounded(warm.slope * dh[i]!, dT[i]!)
  })
  const low_kJ_kg = h[0]!
  const perStretch = stretches / (h[n - 1]! + dh[n - 1]! - low_kJ_kg)
  const first = new Int32Array(stretches + 1)
  for (let k = 0, i = 0; k <= stretches; k++) {
    while (i < n - 1 && h[i + 1]! <= low_kJ_kg + k / perStretch) i++
    first[k] = i
  }
  return { h, dh, T, dT, m0, m1, first, low_kJ_kg, perStretch }
}

/**
 * Tables of a product in a container.
 *
 * @param wall_kJ_kgK  heat capacity of the wall per kg of product, ≥ 0
 */
export function tableOf(s: Substance, wall_kJ_kgK: number): Fast {
  const wall = (t: number) => wall_kJ_kgK * t
  const hL = (t: number) => hLiquid(s, t) + wall(t)
  const hE = (t: number) => hEquilibrium(s, t) + wall(t)
  const cL = (t: number) => cLiquid(s, t) + wall_kJ_kgK
  const cE = (t: number) => cEquilibrium(s, t) + wall_kJ_kgK
  const Tf = Math.max(s.freezingPoint_C, coldestLiquid_C)
  const end = Math.min(endOfFreezing_C(s), Tf)
  const hFreezing_kJ_kg = hL(Tf)
  const first = plateauAtFreezing_kg_kg(s)
  const last = plateauAtStop_kg_kg(s)
  // On the curve just below a plateau all of its ice is there.
  const below = (t: number) => (t >= Tf ? hFreezing_kJ_kg - first * fusionAt(Tf) : hE(t))
  const corners = s.pieces
    .map((piece) => equilibriumTemperature_C(piece.to_osmol_kg))
    .filter((t) => t < Tf && t > end)
  const ends = [Tf, ...corners, end]
  const frozen = (t: number) => (t >= end ? hE(end) - last * fusionAt(end) : hE(t))
  const onIce = [
    ...plateau(Tf, hFreezing_kJ_kg, first * fusionAt(Tf)),
    ...ends.slice(1).flatMap((cold, k) => march(ends[k]!, cold, below, cE)),
    ...plateau(end, hE(end), last * fusionAt(end)),
    ...(end > coldestLiquid_C ? march(end, coldestLiquid_C, frozen, cE) : []),
    ...march(coldestLiquid_C, coldestFrozen_C, hE, cE),
  ]
  return {
    substance: s,
    wall_kJ_kgK,
    hFreezing_kJ_kg,
    liquid: tableFrom(march(warmest_C, coldestLiquid_C, hL, cL)),
    onIce: tableFrom(onIce),
    mostIce_kg_kg: mostIce_kg_kg(s),
  }
}

const cellAt = (t: Table, h: number): number => {
  const at = (h - t.low_kJ_kg) * t.perStretch
  const last = t.h.length - 1
  if (!(at > 0)) return 0
  if (at >= stretches) return last
  let i = t.first[Math.trunc(at)]!
  while (i < last && h >= t.h[i + 1]!) i++
  return i
}

/** Beyond its ends a table goes straight on. */
const read = (t: Table, h: number): number => {
  const i = cellAt(t, h)
  const u = (h - t.h[i]!) / t.dh[i]!
  if (u < 0) return t.T[i]! + u * t.m0[i]!
  if (u > 1) return t.T[i]! + t.dT[i]! + (u - 1) * t.m1[i]!
  const v = u * u
  const w = v * u
  return t.T[i]! + t.dT[i]! * (3 * v - 2 * w) + t.m0[i]! * (w - 2 * v + u) + t.m1[i]! * (w - v)
}

/** The most that a heat capacity is said to be, kJ/(kg K): on a plateau it has no end. */
const mostCp_kJ_kgK = 1e6

const heatCapacity = (t: Table, h: number): number => {
  const i = cellAt(t, h)
  const u = Math.min(1, Math.max(0, (h - t.h[i]!) / t.dh[i]!))
  const slope =
    6 * t.dT[i]! * (u - u * u) + t.m0[i]! * (3 * u * u - 4 * u + 1) + t.m1[i]! * (3 * u * u - 2 * u)
  return slope * mostCp_kJ_kgK > t.dh[i]! ? t.dh[i]! / slope : mostCp_kJ_kgK
}

/** Temperature on the liquid branch at an enthalpy, °C; beyond −40 and +60 °C straight on. */
export function fastLiquid_C(f: Fast, h_kJ_kg: number): number {
  return read(f.liquid, h_kJ_kg)
}

/** Temperature on the equilibrium branch at an enthalpy, °C; above the freezing point the liquid's. */
export function fastOnIce_C(f: Fast, h_kJ_kg: number): number {
  return h_kJ_kg >= f.hFreezing_kJ_kg ? read(f.liquid, h_kJ_kg) : read(f.onIce, h_kJ_kg)
}

/** Heat capacity of the liquid, wall included, kJ/(kg K). */
export function fastLiquidCp(f: Fast, h_kJ_kg: number): number {
  return heatCapacity(f.liquid, h_kJ_kg)
}

/** Apparent heat capacity beside ice, wall included, kJ/(kg K); 1e6 on a plateau. */
export function fastOnIceCp(f: Fast, h_kJ_kg: number): number {
  return h_kJ_kg >= f.hFreezing_kJ_kg
    ? heatCapacity(f.liquid, h_kJ_kg)
    : heatCapacity(f.onIce, h_kJ_kg)
}

/** Ice at an enthalpy, kg per kg of product, from the heat it has given off: right on plateaus too. */
export function fastIce_kg_kg(f: Fast, h_kJ_kg: number): number {
  if (h_kJ_kg >= f.hFreezing_kJ_kg) return 0
  const T = read(f.onIce, h_kJ_kg)
  if (T <= coldestLiquid_C) return f.mostIce_kg_kg
  const gap = hLiquid(f.substance, T) + f.wall_kJ_kgK * T - h_kJ_kg
  return Math.min(f.mostIce_kg_kg, Math.max(0, gap / fusionAt(T)))
}

/** Hazards over depth: low, middle, high and mean, as logarithms. */
export type FastHazard = { readonly ln: readonly Float64Array[] }

const deepest_K = 45
const perKelvin = 20
const lnNone = -300

/** Hazards of one container by depth, for a past that does not change: straight lines in ln. */
export function hazardTableOf(k: Kinetics, past: Exposure, survived: number): FastHazard {
  const ln = Array.from({ length: 4 }, () => new Float64Array(deepest_K * perKelvin + 1))
  for (let i = 0; i <= deepest_K * perKelvin; i++) {
    const { interval, mean } = hazard_h(k, past, survived, i / perKelvin)
    for (const [j, value] of [...interval, mean].entries())
      ln[j]![i] = value > 0 ? Math.max(lnNone, Math.log(value)) : lnNone
  }
  return { ln }
}

/**
 * Hazard of one container per hour.
 *
 * @param which  0 low, 1 middle, 2 high, 3 mean over what is believed
 */
export function fastHazard_h(f: FastHazard, which: 0 | 1 | 2 | 3, depth_K: number): number {
  if (!(depth_K > 0)) return 0
  const ln = f.ln[which]!
  const at = Math.min(depth_K, deepest_K) * perKelvin
  const i = Math.min(Math.trunc(at), ln.length - 2)
  return Math.exp(ln[i]! + (at - i) * (ln[i + 1]! - ln[i]!))
}
