import type { Reading } from '../../config/schema/reading.js'
import type { PlannedProbe } from './plan.js'
import type { AirTrack, SlotTrack } from './state.js'

/**
 * Values that instruments send in place of a temperature: power-on and error codes of one-wire
 * sensors (85, −127, 127.94), of loggers and thermocouple inputs (999.9, ±9999, …) [common practice].
 * No cold store holds anything at 85 °C, so that the code is believed to be one everywhere.
 */
const faultCodes_C = [85, -127, 127.94, 999, 999.9, 9999, -999, -9999, 850, 6553.5, 3276.7, -3276.8]

/** Codes are sent with few decimals: nearer than this it is the code. */
const sameCode_K = 0.005

/** Outside this nothing of the trade is a temperature of a store. */
const widest_C: readonly [number, number] = [-200, 80]

/**
 * May this reading bear on an estimate at all? Its mark, fault codes and the range of its probe;
 * a value at the end of the range is a clipped one (edge situation 72).
 */
export function believable(reading: Reading, probe: PlannedProbe): boolean {
  const { celsius, quality } = reading
  if (celsius === null || !Number.isFinite(celsius)) return false
  if (quality === 'bad' || quality === 'retained') return false
  const isCode = (code: number) => Math.abs(celsius - code) < sameCode_K
  if (probe.given.faultCodes_C.some(isCode) || faultCodes_C.some(isCode)) return false
  const [low, high] = probe.given.range_C ?? widest_C
  return celsius > low && celsius < high
}

/** Temperature in °F of one in °C. */
const fahrenheit = (t_C: number): number => 1.8 * t_C + 32

/** A reading this near to the last one in °F, and this far from it in °C, was sent in °F. */
const nearInF_K = 1.5
const farInC_K = 8

/** A step of level that the declared unit explains and nothing else does (edge situation 15). */
export const looksFahrenheit = (reading_C: number, last_C: number): boolean =>
  Math.abs((reading_C - fahrenheit(last_C)) / 1.8) < nearInF_K &&
  Math.abs(reading_C - last_C) > farInC_K

/** Chance, in logs, below which a run of one value is no longer believed: one in a million. */
const stuckLog = Math.log(1e-6)
const fewestInRun = 8

type Run = Pick<SlotTrack, 'raw_C' | 'same' | 'sameFrom_ms' | 'sameLog' | 'noise_K2'>

/**
 * A run of the very same value, and how unlikely it is for a working probe.
 *
 * A value repeats where the true step plus noise stays within one step of the resolution. With the
 * spread σ between readings that this probe has shown before, the chance of that is about
 * erf(q / 2√2σ); over a run the chances multiply.
 *
 * @param expected_K  how much the value should have changed by the model, K
 * @param resolution_K  of the probe
 */
export function runOf<T extends Run>(
  last: T,
  raw_C: number,
  t_ms: number,
  expected_K: number,
  resolution_K: number,
): Pick<T, 'same' | 'sameFrom_ms' | 'sameLog'> {
  if (last.raw_C !== raw_C) return { same: 1, sameFrom_ms: t_ms, sameLog: 0 }
  const q = Math.max(resolution_K, 0.005)
  const σ = Math.sqrt(last.noise_K2)
  const within = (x: number) => normal((x + q / 2) / σ) - normal((x - q / 2) / σ)
  // The value may sit anywhere in its step of resolution: the mean over that is close to this.
  const p = σ < 1e-6 ? (Math.abs(expected_K) < q ? 1 : 0.05) : Math.max(1e-3, within(expected_K))
  const pSame = Math.min(1, σ < q ? Math.max(p, 0.02) : p)
  return {
    same: last.same + 1,
    sameFrom_ms: last.sameFrom_ms,
    sameLog: last.sameLog + Math.log(pSame),
  }
}

export const isStuck = (run: Pick<AirTrack, 'same' | 'sameLog'>): boolean =>
  run.same >= fewestInRun && run.sameLog < stuckLog

/** How fast the noise of a probe is learned, and from which run of one value on it learns no more. */
const noiseGain = 0.05
const longRun = 4

/**
 * Noise of a probe beyond its resolution, K², after one more reading: from second differences, which
 * a steady ramp does not enter; what rounding alone makes is taken off.
 */
export function noiseAfter(
  last: {
    readonly noise_K2: number
    readonly raw_C: number | null
    readonly before_C: number | null
  },
  raw_C: number,
  same: number,
  resolution_K: number,
): number {
  if (last.raw_C === null || last.before_C === null || same > longRun) return last.noise_K2
  const bend = (raw_C - 2 * last.raw_C + last.before_C) ** 2 / 6 - resolution_K ** 2 / 12
  const most = 9 * Math.max(last.noise_K2, 0.004)
  return Math.max(0, last.noise_K2 + noiseGain * (Math.min(bend, most) - last.noise_K2))
}

/** Standard normal distribution function (Abramowitz & Stegun 1964, 26.2.17; error below 1e-7). */
export function normal(x: number): number {
  const t = 1 / (1 + 0.2316419 * Math.abs(x))
  const tail =
    0.3989422804014327 *
    Math.exp((-x * x) / 2) *
    t *
    (0.31938153 + t * (-0.356563782 + t * (1.781477937 + t * (-1.821255978 + t * 1.330274429))))
  return x >= 0 ? 1 - tail : tail
}
