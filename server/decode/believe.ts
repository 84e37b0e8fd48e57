import { aheadOfReceipt_ms, type Quality, type Reading } from '../../config/schema/reading.js'
import type { Known } from './mappings.js'
import type { Complaint, Found, Message } from './message.js'
import { beyond_ms, earliest_ms, inWords, likelierUnit } from './time.js'

/**
 * From what a codec found to a reading. Nothing is dropped here: what may not be believed is kept
 * with quality bad, and a notice says why.
 */

/** What matter of this trade can have; the limits of the site file's temperatures. */
const possible_C = [-273.15, 200] as const

/** A code is sent exactly, or through a conversion of °F or K that rounds, K. */
const sameCode_K = 0.005

/** Within this of what is expected a value in °F counts as a likely one, K. */
const near_K = 3
/** Outside what is expected by more than this, a value in °C is worth a question, K. */
const far_K = 15

const within = (v: number, [low, high]: readonly [number, number], by = 0): boolean =>
  v >= low - by && v <= high + by

const asFahrenheit_C = (v: number): number => (v - 32) / 1.8

/** A value that makes sense here only if it was meant as °F. */
const looksLikeFahrenheit = (known: Known, found: Found): boolean => {
  const v = found.celsius
  if (v === null || found.unit !== 'Cel') return false
  const { expected_C } = known
  if (expected_C !== null)
    return !within(v, expected_C, far_K) && within(asFahrenheit_C(v), expected_C, near_K)
  const range_C = known.probe.range_C
  return range_C !== undefined && !within(v, range_C) && within(asFahrenheit_C(v), range_C)
}

const fahrenheit = (known: Known, found: Found): Complaint => ({
  code: 'looks-like-fahrenheit',
  field: found.field,
  value: found.written,
  problem: `probe "${known.probe.id}" sends this as °C; read as °F it is ${asFahrenheit_C(
    found.celsius ?? 0,
  ).toFixed(
    1,
  )} °C, which ${known.expected_C === null ? 'lies in its range' : 'is what is expected there'}`,
  remedy: 'set the device to °C, or declare "unit": "degF" in the probe\'s source',
  notice: true,
})

/** Whether the number may be a temperature of this probe, and what to say if not. */
const judgeValue = (known: Known, found: Found): { bad: boolean; say: Complaint | null } => {
  const { probe } = known
  const about = { field: found.field, value: found.written, notice: true as const }
  const v = found.celsius
  if (v === null)
    return {
      bad: true,
      say: {
        ...about,
        code: 'no-number',
        problem: `probe "${probe.id}" sent no number`,
        remedy: 'look at the sensor and its cable; the reading is kept with quality bad',
      },
    }
  if (probe.faultCodes_C.some((code) => Math.abs(code - v) < sameCode_K))
    return {
      bad: true,
      say: {
        ...about,
        code: 'fault-code',
        problem: `probe "${probe.id}" reports a fault with this number`,
        remedy: 'look at the sensor and its cable; the reading is kept with quality bad',
      },
    }
  const range_C = probe.range_C ?? possible_C
  const outside = !within(v, range_C) || !within(v, possible_C)
  if (looksLikeFahrenheit(known, found)) return { bad: outside, say: fahrenheit(known, found) }
  if (!outside) return { bad: false, say: null }
  return {
    bad: true,
    say: {
      ...about,
      code: 'out-of-range',
      problem: `probe "${probe.id}" measures from ${range_C[0]} to ${range_C[1]} °C`,
      remedy: 'check its unit and wiring, or correct `range_C` in the site file',
    },
  }
}

/** When it was measured, how that is known, and what to say of it. */
const judgeTime = (
  known: Known,
  found: Found,
  receivedAt_ms: number,
): { t_ms: number; timeSource: Reading['timeSource']; bad: boolean; say: Complaint | null } => {
  const { t_ms, timeSource } = found
  if (t_ms === null) return { t_ms: receivedAt_ms, timeSource: 'receipt', bad: false, say: null }
  const about = { field: found.timeField, value: found.timeWritten, notice: true as const }
  // Written this way round, NaN is told too.
  if (!(t_ms >= earliest_ms && t_ms <= receivedAt_ms + beyond_ms)) {
    const unit =
      typeof found.timeWritten === 'number' ? likelierUnit(found.timeWritten, receivedAt_ms) : null
    const read = Number.isNaN(t_ms)
      ? `this is not a time as declared (${found.timeFormat})`
      : `read as ${found.timeFormat} it is ${inWords(t_ms)}`
    return {
      t_ms: receivedAt_ms,
      timeSource: 'receipt',
      bad: true,
      say: {
        ...about,
        code: 'impossible-time',
        problem: unit === null ? read : `${read}; ${unit.text}`,
        remedy: `${
          unit === null
            ? 'set the clock of the device, and send the time as its mapping declares'
            : `the device sends ${unit.unit}: let device and mapping agree`
        }; the reading is kept at its receipt, quality bad`,
      },
    }
  }
  if (t_ms - receivedAt_ms > aheadOfReceipt_ms)
    return {
      t_ms,
      timeSource,
      bad: true,
      say: {
        ...about,
        code: 'ahead-of-receipt',
        problem: `the clock of probe "${known.probe.id}" is ${Math.round((t_ms - receivedAt_ms) / 1000)} s ahead of its receipt`,
        remedy: 'set the clock of the device; the reading is kept with quality bad',
      },
    }
  return { t_ms, timeSource, bad: false, say: null }
}

/** A reading from what was found, with all that is to be said about it. */
export const believe = (
  message: Message,
  known: Known,
  found: Found,
): { reading: Reading; complaints: Complaint[] } => {
  const value = judgeValue(known, found)
  const time = judgeTime(known, found, message.receivedAt_ms)
  const quality: Quality = value.bad || time.bad ? 'bad' : message.retain ? 'retained' : 'good'
  return {
    reading: {
      probe: known.probe.id,
      t_ms: time.t_ms,
      receivedAt_ms: message.receivedAt_ms,
      celsius: found.celsius,
      seq: found.seq,
      quality,
      timeSource: time.timeSource,
    },
    complaints: [value.say, time.say].filter((c) => c !== null),
  }
}
