import { Refusal } from '../../config/schema/refusal.js'

/**
 * Water and ice at 101 325 Pa, by fits made here to IAPWS G12-15 (Holten, Sengers, Anisimov 2014,
 * J. Phys. Chem. Ref. Data 43, 043101), IAPWS-95 and R10-06(2009) (Feistel, Wagner 2006).
 * test/reference holds the IAPWS values and the script that made them.
 */

/** Below it the equation for supercooled water stops being physical (cp diverges near −45 °C). */
export const coldestLiquid_C = -40
/** Top of the range, well above any storage: the fits end at 30 °C and are smooth beyond. */
export const warmest_C = 60
export const coldestIce_C = -100

const within = (field: string, t_C: number, low_C: number, high_C: number, what: string): void => {
  if (!(t_C >= low_C && t_C <= high_C))
    // written this way round, NaN is refused too
    throw new Refusal(
      'out-of-range',
      field,
      t_C,
      `${what} is known from ${low_C} to ${high_C} °C`,
      'give a temperature within it',
    )
}

/**
 * Isobaric heat capacity of liquid water, supercooled included.
 *
 *     cp = 4.10981677 + 3.99740568e-4 t + 2.56457043e-5 t² + 2.71029880e-2 / (t/100 + 0.500493236)²
 *
 * @param t_C  −40 … 60 °C
 * @returns    kJ/(kg K), within 0.35 % of G12-15 from −40 to 30 °C
 * @throws     Refusal 'out-of-range'
 * @source     fit made here to IAPWS G12-15
 */
export function liquid_cp_kJ_kgK(t_C: number): number {
  within('t_C', t_C, coldestLiquid_C, warmest_C, 'liquid water')
  const u = t_C / 100 + 0.500493236
  return 4.10981677 + t_C * (3.99740568e-4 + t_C * 2.56457043e-5) + 2.7102988e-2 / (u * u)
}

/**
 * Enthalpy of liquid water relative to 0 °C: the integral of `liquid_cp_kJ_kgK`.
 *
 *     h = 4.10981677 t + 1.99870284e-4 t² + 8.5485681e-6 t³
 *         − 2.71029880 [ 1/(t/100 + 0.500493236) − 1/0.500493236 ]
 *
 * @param t_C  −40 … 60 °C
 * @returns    kJ/kg, within 0.075 kJ/kg of G12-15
 * @throws     Refusal 'out-of-range'
 * @source     fit made here to IAPWS G12-15
 */
export function liquid_h_kJ_kg(t_C: number): number {
  within('t_C', t_C, coldestLiquid_C, warmest_C, 'liquid water')
  return (
    t_C * (4.10981677 + t_C * (1.99870284e-4 + t_C * 8.5485681e-6)) -
    2.7102988 * (1 / (t_C / 100 + 0.500493236) - 1 / 0.500493236)
  )
}

/**
 * Isobaric heat capacity of ice Ih.
 *
 *     cp = 2.09699466 + 7.41602152e-3 t + 2.58176795e-6 t²
 *
 * @param t_C  −100 … 0.01 °C
 * @returns    kJ/(kg K), within 0.016 % from −80 to 0 °C
 * @throws     Refusal 'out-of-range'
 * @source     fit made here to IAPWS R10-06(2009)
 */
export function ice_cp_kJ_kgK(t_C: number): number {
  within('t_C', t_C, coldestIce_C, 0.01, 'ice')
  return 2.09699466 + t_C * (7.41602152e-3 + t_C * 2.58176795e-6)
}

/**
 * Enthalpy of ice relative to ice at 0 °C: the integral of `ice_cp_kJ_kgK`.
 *
 * @param t_C  −100 … 0.01 °C
 * @returns    kJ/kg
 * @throws     Refusal 'out-of-range'
 * @source     as `ice_cp_kJ_kgK`
 */
export function ice_h_kJ_kg(t_C: number): number {
  within('t_C', t_C, coldestIce_C, 0.01, 'ice')
  return t_C * (2.09699466 + t_C * (7.41602152e-3 / 2 + (t_C * 2.58176795e-6) / 3))
}

/**
 * Density of liquid water, supercooled included.
 *
 * @param t_C  −40 … 30 °C
 * @returns    kg/m³, within 0.078 % of G12-15
 * @throws     Refusal 'out-of-range'
 * @source     fit made here to IAPWS G12-15
 */
export function liquid_density_kg_m3(t_C: number): number {
  within('t_C', t_C, coldestLiquid_C, 30, 'the density of water')
  return (
    999.816046 +
    t_C *
      (8.7942662e-2 +
        t_C *
          (-8.86534313e-3 + t_C * (1.03738936e-5 + t_C * (-2.39360481e-6 + t_C * 1.27121596e-7))))
  )
}

/**
 * Density of ice Ih.
 *
 * @param t_C  −100 … 0.01 °C
 * @returns    kg/m³, within 0.0016 % from −80 to 0 °C
 * @throws     Refusal 'out-of-range'
 * @source     fit made here to IAPWS R10-06(2009)
 */
export function ice_density_kg_m3(t_C: number): number {
  within('t_C', t_C, coldestIce_C, 0.01, 'ice')
  return 916.708236 + t_C * (-0.148546644 - t_C * 2.69185e-4)
}
