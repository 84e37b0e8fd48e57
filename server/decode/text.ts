import type { Complaint } from './message.js'

// Each decodes whole payloads, so neither keeps anything between two calls.
const strict = new TextDecoder('utf-8', { fatal: true })
const lenient = new TextDecoder('utf-8')

/** The text of a payload, or null where it is not UTF-8. A byte order mark is no part of it. */
export const textOf = (payload: Uint8Array): string | null => {
  try {
    return strict.decode(payload)
  } catch (error) {
    if (error instanceof TypeError) return null // what TextDecoder throws for broken UTF-8
    throw error
  }
}

/** Bytes as a person can read them in a message. */
export const glimpse = (payload: Uint8Array): string => lenient.decode(payload.subarray(0, 80))

/** The JSON of a payload, or what is wrong with it. */
export const jsonOf = (payload: Uint8Array): { json: unknown } | { complaint: Complaint } => {
  const text = textOf(payload)
  if (text === null)
    return {
      complaint: {
        code: 'not-utf8',
        field: 'payload',
        value: glimpse(payload),
        problem: 'these bytes are not UTF-8 text',
        remedy: 'send JSON in UTF-8, or declare another payload for this topic',
      },
    }
  try {
    return { json: JSON.parse(text) as unknown }
  } catch (error) {
    // SyntaxError, or RangeError from a nest too deep for the parser.
    if (!(error instanceof SyntaxError || error instanceof RangeError)) throw error
    return {
      complaint: {
        code: 'not-json',
        field: 'payload',
        value: text.slice(0, 80),
        problem: `this is not JSON (${error.message.slice(0, 120)})`,
        remedy: 'send one JSON document a message; NaN and single quotes are not JSON',
      },
    }
  }
}

/**
 * A number as people and devices write it, and as nothing else does: no hex, no decimal comma, no
 * unit behind it.
 */
const plain = /^\s*[-+]?(\d+(\.\d*)?|\.\d+)([eE][-+]?\d+)?\s*$/
export const longestNumber_bytes = 32

/** @returns the number; null for a written NaN, the sensor's way to say it has none; else undefined */
export const numberOfText = (text: string): number | null | undefined => {
  if (text.length > longestNumber_bytes) return undefined
  if (plain.test(text)) return Number(text)
  return /^\s*[-+]?nan\s*$/i.test(text) ? null : undefined
}
