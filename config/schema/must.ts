import { z } from 'zod'

/** A check that knows its remedy; zod's own checks know only the problem. */
export const must = <T>(holds: (v: T) => boolean, problem: string, remedy: string) =>
  z.refine<T>(holds, { error: problem, params: { remedy } })

/** A finite number; zod refuses NaN and infinities. */
export const finite = z.number()

/** A fraction of mass, kg per kg of product. */
export const fraction_kg_kg = z
  .number()
  .check(
    must(
      (v) => v >= 0 && v <= 1,
      'a mass fraction lies between 0 and 1',
      'give kg per kg of product',
    ),
  )

export const positive = (what: string, unit: string) =>
  z.number().check(must((v) => v > 0, `${what} is never 0 or negative`, `give it in ${unit}`))

export const notNegative = (what: string, unit: string) =>
  z.number().check(must((v) => v >= 0, `${what} is never negative`, `give it in ${unit}`))

/** A Celsius temperature that matter of this trade can have. */
export const celsius = z
  .number()
  .check(
    must(
      (v) => v >= -273.15 && v <= 200,
      'no stored item has this temperature',
      'give degrees Celsius, above −273.15',
    ),
  )

/** A standard uncertainty of a temperature, K. */
export const u_K = notNegative('a standard uncertainty', 'kelvin')

/** RFC 3339 with an offset: `2026-01-05T03:10:00Z`. */
export const instant = z.iso.datetime({
  offset: true,
  error: 'this is not a time with its offset (RFC 3339)',
})

/** Two temperatures, low first. */
export const range_C = z
  .tuple([celsius, celsius])
  .check(
    must(
      ([low, high]) => low < high,
      'the low end is not below the high end',
      'give [low, high] in °C',
    ),
  )
