import type { Interval } from './freezingTime.js'

/** What a storage unit says of the air in it. */
export type Chamber = {
  readonly airVolume_m3?: number | undefined
  readonly fixtures_kJ_K?: number | undefined
  readonly wall_UA_W_K?: number | undefined
  /** How much more heat the cooling takes per kelvin of warmer air. */
  readonly cooling_W_K?: number | undefined
}

/** Heat capacity of a cubic metre of air at −5 °C, kJ/(m³ K): 1.3164 kg/m³ × 1.006 kJ/(kg K). */
export const air_kJ_m3K = 1.324

/** Fixtures, frost and the controller are known to a factor of two. */
const factor = 2

/**
 * Heat given to the surroundings while it freezes, W: the flux is that of the end of the jump, and
 * stays there until the ice is done.
 *
 *     P = UA (T_e − T_a)
 */
export function freezingPower_W(UA_W_K: number, end_C: number, air_C: number): number {
  return Math.max(0, UA_W_K * (end_C - air_C))
}

/**
 * How much `count` containers that turn together warm the air of their storage unit.
 *
 *     C_a dT_a/dt = P + UA_wall (T_room − T_a) − Q_ref(T_a)
 *     rise = n UA (T_e − T_a) / (UA_wall + Q_ref′ + n UA) · (1 − e^(−t/τ))     τ = C_a/(…)
 *
 * n UA stands below as well: the warmer the air, the less the items give it.
 *
 * @param lasts_h  how long they freeze; null: long
 * @returns        K, half and twice the middle, never above T_e − T_a; null where neither the
 *                 walls nor the cooling are known
 */
export function airRise_K(
  chamber: Chamber,
  count: number,
  UA_W_K: number,
  end_C: number,
  air_C: number,
  lasts_h: number | null,
): Interval | null {
  if (chamber.wall_UA_W_K === undefined && chamber.cooling_W_K === undefined) return null
  const most = Math.max(0, end_C - air_C)
  const given = count * UA_W_K
  const taken = (chamber.wall_UA_W_K ?? 0) + (chamber.cooling_W_K ?? 0) + given
  const C_kJ_K = (chamber.airVolume_m3 ?? 0) * air_kJ_m3K + (chamber.fixtures_kJ_K ?? 0)
  const reached =
    lasts_h === null || C_kJ_K === 0 ? 1 : -Math.expm1((-lasts_h * 3.6 * taken) / C_kJ_K)
  const rise = ((given * most) / taken) * reached
  return [rise / factor, rise, Math.min(most, rise * factor)]
}

/** Share of its own coupling with which a neighbour faces the freezing one: far, beside, touching. */
const facing: Interval = [0.05, 1 / 6, 0.5]

/**
 * How much the nearest neighbour is warmed by one container beside it.
 *
 *     rise = f/(1 + f) (T_e − T_a)       f: share of the neighbour's surface that faces it
 *
 * @returns K; one of six faces in the middle [common practice]
 */
export function neighbourRise_K(end_C: number, air_C: number): Interval {
  const most = Math.max(0, end_C - air_C)
  const rise = (f: number) => (f / (1 + f)) * most
  return [rise(facing[0]), rise(facing[1]), rise(facing[2])]
}
