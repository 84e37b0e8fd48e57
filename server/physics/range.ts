import { Refusal } from '../../config/schema/refusal.js'

/**
 * A temperature within the range of a correlation.
 *
 * @throws Refusal 'out-of-range', NaN included
 */
export function within_C(t_C: number, low_C: number, high_C: number, what: string): number {
  if (t_C >= low_C && t_C <= high_C) return t_C
  throw new Refusal(
    'out-of-range',
    't_C',
    t_C,
    `${what} is known from ${low_C} to ${high_C} °C`,
    `give a temperature from ${low_C} to ${high_C} °C`,
  )
}
