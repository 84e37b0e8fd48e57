/** Units a temperature may be written in. °F counts only where a mapping declares it. */
export type Unit = 'Cel' | 'K' | 'degF'

/** A conversion leaves noise in the last digits (273.65 K − 273.15); nothing measures a µK. */
const cleaned = (v_C: number): number => Math.round(v_C * 1e6) / 1e6

/**
 * Degrees Celsius of a number in its unit; null where it is no finite number.
 *
 * @source K: SI, t = T − 273.15; °F: t = (F − 32) / 1.8
 */
export const toCelsius = (v: number, unit: Unit): number | null => {
  if (!Number.isFinite(v)) return null
  if (unit === 'Cel') return v
  const v_C = unit === 'K' ? v - 273.15 : (v - 32) / 1.8
  const clean_C = cleaned(v_C)
  return Number.isFinite(clean_C) ? clean_C : v_C
}
