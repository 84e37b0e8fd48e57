import { plateauAtFreezing_kg_kg, whereIce } from './branches.js'
import { coldestLiquid_C, pureMelting_C } from './constants.js'
import { cEquilibrium, cLiquid, endOfFreezing_C, iceAt, mostIce_kg_kg } from './curves.js'
import { equilibriumTemperature_C } from './equilibrium.js'
import { fusionAt } from './fusion.js'
import type { Jump } from './jump.js'
import type { Substance } from './substance.js'
import { integral } from './water.js'

/** Low, middle, high. */
export type Interval = readonly [number, number, number]

/** How a container of it exchanges heat. */
export type Coupling = { readonly UA_W_K: number; readonly fill_kg: number }

/** What is still to come after the jump. Null: not known, or not to be had in this air. */
export type Solidifying = {
  readonly iceAtAir_kg_kg: number | null
  readonly heatToSolid_kJ_kg: number | null
  readonly solid_h: Interval | null
  /** Where the air cannot make it solid: the ice that it can make, and when 95 % of it is there. */
  readonly settlesAt_kg_kg: number | null
  readonly settle_h: Interval | null
}

/** Share of the ice that can form at which the product counts as solid (interfaces.md §4). */
export const solidShare = 0.95

/** Convection is known to about 40 %: the coupling times these gives low, middle and high. */
const couplings = [1.6, 1, 0.6] as const

/** Parts of the quadrature per smooth stretch: 1e-6 of the time for dilute and strong products. */
const parts = 7

/** Keeps ln(T_m − T) finite at the melting point, K. */
const least = 1e-12

const interval = (time_h: number): Interval => [
  time_h / couplings[0],
  time_h / couplings[1],
  time_h / couplings[2],
]

/** Where a body stands on the equilibrium branch. */
type Place = { readonly T_C: number; readonly ice_kg_kg: number }

/**
 * Time that a lumped body needs from one place on the equilibrium branch to a colder one, in air
 * that stays as it is.
 *
 *     m dh/dt = −UA (T(h) − T_a)      t = (m/UA) ∫ dh/(T − T_a)
 *
 * By quadrature over T where it is liquid, over ln(T_m − T) where ice grows (dh is nearly even in
 * it), and as heat over ΔT where ice forms at one temperature.
 *
 * @param wall_kJ_kgK  heat capacity of the wall per kg of product
 * @param to           colder than `from`, and warmer than the air; with air warmer than both the time of the
 *                     way back comes out negative
 * @returns            hours, for a Biot number below 0.3 within 4 %; the coupling rules the error
 */
export function lumpedTime_h(
  s: Substance,
  wall_kJ_kgK: number,
  from: Place,
  to: Place,
  air_C: number,
  { UA_W_K, fill_kg }: Coupling,
): number {
  const Tf = Math.max(s.freezingPoint_C, coldestLiquid_C)
  const end = Math.min(endOfFreezing_C(s), Tf)
  const gap = (t: number) => t - air_C
  const onCurve = (u: number) => {
    const θ = Math.exp(u)
    const t = pureMelting_C + least - θ
    return ((cEquilibrium(s, t) + wall_kJ_kgK) * θ) / gap(t)
  }
  let sum = 0
  const liquidTo = Math.max(to.T_C, Tf)
  if (from.T_C > liquidTo)
    sum += integral((t) => (cLiquid(s, t) + wall_kJ_kgK) / gap(t), liquidTo, from.T_C, parts)
  const first = plateauAtFreezing_kg_kg(s)
  if (first > 0 && to.T_C <= Tf)
    sum += (Math.max(0, Math.min(to.ice_kg_kg, first) - from.ice_kg_kg) * fusionAt(Tf)) / gap(Tf)
  const warm = Math.min(from.T_C, Tf)
  const cold = Math.max(to.T_C, end)
  if (warm > cold) {
    // Where the fit of a solute ends dx/dT has a corner: a stretch ends there too.
    const corners = s.pieces
      .map((piece) => equilibriumTemperature_C(piece.to_osmol_kg))
      .filter((t) => t < warm && t > cold)
    const ends = [warm, ...corners, cold].map((t) => Math.log(pureMelting_C - t + least))
    for (let k = 1; k < ends.length; k++) sum += integral(onCurve, ends[k - 1]!, ends[k]!, parts)
  }
  if (to.T_C <= end && s.stop?.kind === 'eutectic') {
    const before = Math.max(from.ice_kg_kg, iceAt(s, end))
    sum += (Math.max(0, to.ice_kg_kg - before) * fusionAt(end)) / gap(end)
  }
  return (sum * 1000 * fill_kg) / UA_W_K / 3600
}

/** Air closer than this to a body takes no heat from it that anybody could wait for, K. */
const leastGap_K = 1e-6

/**
 * What must still leave after the jump until the product is solid, and how long that takes.
 *
 * *Solid* is 95 % of the ice that can form at the end of freezing (stop, or −40 °C), or at the air
 * where that is warmer. Air that is as warm as the product where the jump ends cannot do it: then
 * the ice melts back to what the air leaves, and `settle_h` is when 95 % of that way is gone.
 *
 * @param after     the jump; for a product that is not supercooled it is where it stands
 * @param air_C     null: not known; then solid is at the end of freezing, and takes no one knows
 *                  how long
 * @param coupling  null: not known
 */
export function solidifying(
  s: Substance,
  wall_kJ_kgK: number,
  after: Jump,
  air_C: number | null,
  coupling: Coupling | null,
): Solidifying {
  const iceAtAir_kg_kg = air_C === null ? null : iceAt(s, air_C)
  const target = solidShare * (iceAtAir_kg_kg ?? mostIce_kg_kg(s))
  const from = { T_C: after.end_C, ice_kg_kg: after.firstIce_kg_kg }
  const solid =
    target > from.ice_kg_kg
      ? { ...whereIce(s, wall_kJ_kgK, target), ice_kg_kg: target }
      : { ...from, h_kJ_kg: after.h_kJ_kg }
  const cannot = target <= 0 || (air_C !== null && solid.T_C - air_C < leastGap_K)
  const known = air_C !== null && coupling !== null
  if (cannot)
    return {
      iceAtAir_kg_kg,
      heatToSolid_kJ_kg: null,
      solid_h: null,
      settlesAt_kg_kg: iceAtAir_kg_kg,
      settle_h: known ? meltingBack_h(s, wall_kJ_kgK, from, air_C, coupling) : null,
    }
  return {
    iceAtAir_kg_kg,
    heatToSolid_kJ_kg: after.h_kJ_kg - solid.h_kJ_kg,
    solid_h: known ? interval(lumpedTime_h(s, wall_kJ_kgK, from, solid, air_C, coupling)) : null,
    settlesAt_kg_kg: null,
    settle_h: null,
  }
}

/** Time until 95 % of the ice that the air will melt has melted; null where there is none. */
const meltingBack_h = (
  s: Substance,
  wall_kJ_kgK: number,
  from: Place,
  air_C: number,
  coupling: Coupling,
): Interval | null => {
  const melts = from.ice_kg_kg - iceAt(s, air_C)
  if (!(melts > 0)) return null
  const ice_kg_kg = from.ice_kg_kg - solidShare * melts
  const { T_C } = whereIce(s, wall_kJ_kgK, ice_kg_kg)
  if (!(air_C - T_C >= leastGap_K)) return null
  // The same way walked back: every step takes heat from warmer air, so the sum is negative.
  return interval(-lumpedTime_h(s, wall_kJ_kgK, { T_C, ice_kg_kg }, from, air_C, coupling))
}
