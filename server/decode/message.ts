import type { Reading, TimeSource } from '../../config/schema/reading.js'
import type { Refused } from '../seam.js'
import type { Unit } from './unit.js'

/** A message as decode takes it: bytes, where they came from, and when. */
export type Message = {
  readonly topic: string
  readonly payload: Uint8Array
  /** A broker's stored copy: last known, not fresh. */
  readonly retain: boolean
  /** By the site's clock; decode has none of its own. */
  readonly receivedAt_ms: number
  /** Name of the outside broker; null or absent for our own. */
  readonly broker?: string | null
}

/** What a message came to. Readings beside a bad record are kept; each problem is told. */
export type Decoded = {
  readonly readings: readonly Reading[]
  readonly refused: readonly Refused[]
}

/** What is amiss, in the words of a Refusal, without the message it belongs to. */
export type Complaint = {
  readonly code: string
  readonly field: string
  readonly value: unknown
  readonly problem: string
  readonly remedy: string
  /** The reading was kept; this only says what is amiss with it. */
  readonly notice?: true
}

/** What a codec finds: a temperature of a probe as written, before anything is believed. */
export type Found = {
  /** Null where the sender wrote that there is no number. */
  readonly celsius: number | null
  readonly field: string
  /** The number as it was written, in its own unit. */
  readonly written: unknown
  readonly unit: Unit
  /** Null: no time was sent, the receipt counts. NaN: what was sent is no time. */
  readonly t_ms: number | null
  /** How the time was to be written, in words. */
  readonly timeFormat: string
  readonly timeSource: TimeSource
  readonly timeField: string
  readonly timeWritten: unknown
  readonly seq: number
}

/** Refusals that one message may cause. Past it the rest is counted in the last one. */
const mostComplaints = 20

/** Characters of a refused value that are stored beside it; the payload is stored whole. */
const shownCharacters = 80

const show = (value: unknown): string =>
  (typeof value === 'string' ? value : (JSON.stringify(value) ?? String(value))).slice(
    0,
    shownCharacters,
  )

/** The complaints of one message as rows for the quarantine. */
export const refusedOf = (message: Message, complaints: readonly Complaint[]): Refused[] => {
  const told =
    complaints.length <= mostComplaints
      ? complaints
      : [
          ...complaints.slice(0, mostComplaints - 1),
          {
            code: 'more',
            field: 'payload',
            value: complaints.length,
            problem: `${complaints.length - mostComplaints + 1} more records of this message could not be used`,
            remedy: 'correct those named first',
          },
        ]
  return told.map((c) => ({
    receivedAt_ms: message.receivedAt_ms,
    topic: message.topic,
    payload: message.payload,
    code: c.code,
    field: c.field,
    value: show(c.value),
    problem: c.problem,
    remedy: c.remedy,
    ...('notice' in c && c.notice === true ? { notice: true as const } : {}),
  }))
}
