import { coldestFrozen_C, coldestLiquid_C, warmest_C } from './constants.js'
import { within_C } from './range.js'

/** Where the pole of the liquid's heat capacity stands, as a share of 100 K below 0 °C. */
const pole = 0.500493236

/**
 * Heat capacity of liquid water, supercooled or not, at 101 325 Pa.
 *
 *     c = 4.10981677 + 3.99740568e-4 t + 2.56457043e-5 t² + 2.71029880e-2/(t/100 + 0.500493236)²
 *
 * The pole carries the rise on supercooling: 4.22 at 0, 4.41 at −20, 6.0 kJ/(kg K) at −38 °C.
 *
 * @param t_C  −40 … +60 °C
 * @returns    kJ/(kg K), within 0.35 % to 30 °C and 1.6 % to 60 °C
 * @throws     Refusal 'out-of-range'
 * @source     fitted to IAPWS G12-15 (Holten et al. 2014, J. Phys. Chem. Ref. Data 43, 043101)
 *             and IAPWS-95 above 27 °C
 */
export function liquidCp_kJ_kgK(t_C: number): number {
  return cpOfLiquid(within_C(t_C, coldestLiquid_C, warmest_C, 'liquid water'))
}

/** `liquidCp_kJ_kgK` for callers that hold the range themselves. */
export function cpOfLiquid(t: number): number {
  const u = t / 100 + pole
  return 4.10981677 + t * (3.99740568e-4 + t * 2.56457043e-5) + 2.7102988e-2 / (u * u)
}

/**
 * Enthalpy of liquid water from 0 °C: the primitive of `liquidCp_kJ_kgK`.
 *
 * @param t_C  −40 … +60 °C
 * @returns    kJ/kg, within 0.075 kJ/kg to 30 °C and 1 kJ/kg to 60 °C
 * @throws     Refusal 'out-of-range'
 * @source     as `liquidCp_kJ_kgK`
 */
export function liquidWaterEnthalpy_kJ_kg(t_C: number): number {
  return hOfLiquid(within_C(t_C, coldestLiquid_C, warmest_C, 'liquid water'))
}

/** `liquidWaterEnthalpy_kJ_kg` for callers that hold the range themselves. */
export function hOfLiquid(t: number): number {
  return (
    t * (4.10981677 + t * (1.99870284e-4 + t * 8.5485681e-6)) -
    2.7102988 * (1 / (t / 100 + pole) - 1 / pole)
  )
}

/**
 * Entropy of liquid water from 0 °C, the integral of c dT/T by five-point Gauss quadrature on
 * four equal parts.
 *
 * @param t_C  −40 … +60 °C
 * @returns    kJ/(kg K), as good as `liquidCp_kJ_kgK`
 * @throws     Refusal 'out-of-range'
 */
export function liquidWaterEntropy_kJ_kgK(t_C: number): number {
  within_C(t_C, coldestLiquid_C, warmest_C, 'liquid water')
  return integral((t) => cpOfLiquid(t) / (t + 273.15), 0, t_C, 4)
}

/**
 * Density of liquid water at 101 325 Pa.
 *
 * @param t_C  −40 … +30 °C
 * @returns    kg/m³, within 0.078 %
 * @throws     Refusal 'out-of-range'
 * @source     fitted to IAPWS G12-15 (Holten et al. 2014)
 */
export function liquidDensity_kg_m3(t_C: number): number {
  const t = within_C(t_C, coldestLiquid_C, 30, 'the density of liquid water')
  return (
    999.816046 +
    t *
      (8.7942662e-2 +
        t * (-8.86534313e-3 + t * (1.03738936e-5 + t * (-2.39360481e-6 + t * 1.27121596e-7))))
  )
}

/**
 * Heat capacity of ice Ih at 101 325 Pa.
 *
 *     c = 2.09699466 + 7.41602152e-3 t + 2.58176795e-6 t²
 *
 * @param t_C  −200 … +0.01 °C
 * @returns    kJ/(kg K), within 0.016 % down to −80 °C and 6 % down to −196 °C
 * @throws     Refusal 'out-of-range'
 * @source     fitted to IAPWS R10-06(2009) (Feistel and Wagner 2006)
 */
export function iceCp_kJ_kgK(t_C: number): number {
  const t = within_C(t_C, coldestFrozen_C, 0.01, 'ice')
  return 2.09699466 + t * (7.41602152e-3 + t * 2.58176795e-6)
}

/** Enthalpy of ice from 0 °C, kJ/kg: the primitive of `iceCp_kJ_kgK`, same range and source. */
export function iceEnthalpy_kJ_kg(t_C: number): number {
  return hOfIce(within_C(t_C, coldestFrozen_C, 0.01, 'ice'))
}

/** `iceEnthalpy_kJ_kg` for callers that hold the range themselves. */
export function hOfIce(t: number): number {
  return t * (2.09699466 + t * (3.70801076e-3 + t * 8.6058932e-7))
}

/** Entropy of ice from 0 °C, kJ/(kg K): ∫ c dT/T in closed form, same range and source. */
export function iceEntropy_kJ_kgK(t_C: number): number {
  const t = within_C(t_C, coldestFrozen_C, 0.01, 'ice')
  const T0 = 273.15
  const T = t + T0
  const [a, b, c] = [2.09699466, 7.41602152e-3, 2.58176795e-6]
  // With t = T − T0: a + b t + c t² = A + B T + c T²
  const A = a - b * T0 + c * T0 * T0
  const B = b - 2 * c * T0
  return A * Math.log(T / T0) + B * (T - T0) + (c / 2) * (T * T - T0 * T0)
}

/**
 * Density of ice Ih at 101 325 Pa.
 *
 * @param t_C  −80 … +0.01 °C
 * @returns    kg/m³, within 0.0016 %
 * @throws     Refusal 'out-of-range'
 * @source     fitted to IAPWS R10-06(2009)
 */
export function iceDensity_kg_m3(t_C: number): number {
  const t = within_C(t_C, -80, 0.01, 'the density of ice')
  return 916.708236 + t * (-0.148546644 + t * -2.69185e-4)
}

/** Nodes and weights of five-point Gauss–Legendre quadrature on −1 … 1. */
const gauss: readonly (readonly [number, number])[] = [
  [-0.906179845938664, 0.236926885056189],
  [-0.538469310105683, 0.478628670499366],
  [0, 0.568888888888889],
  [0.538469310105683, 0.478628670499366],
  [0.906179845938664, 0.236926885056189],
]

/** ∫ f from a to b by five-point Gauss quadrature on equal parts. */
export function integral(
  f: (x: number) => number,
  from: number,
  to: number,
  parts: number,
): number {
  const half = (to - from) / parts / 2
  let sum = 0
  for (let p = 0; p < parts; p++) {
    const middle = from + (2 * p + 1) * half
    for (const [x, w] of gauss) sum += w * f(middle + x * half)
  }
  return sum * half
}
