import type { Reading } from '../../config/schema/reading.js'
import { believe } from './believe.js'
import { decodeJson, decodeNumber } from './mapped.js'
import type { Known, Mapping, Mappings } from './mappings.js'
import { type Complaint, type Decoded, type Found, type Message, refusedOf } from './message.js'
import { decodeSenml } from './senml.js'
import { glimpse } from './text.js'

/** The longest payload that is looked into. A pack of a gateway has a few kilobytes. */
export const longestPayload_bytes = 64 * 1024

type Result = {
  readonly found: readonly { known: Known; found: Found; distrust?: boolean }[]
  readonly complaints: readonly Complaint[]
}

/** A payload format is one more case here, and the compiler asks for it. */
const byPayload = (message: Message, mapping: Mapping): Result => {
  switch (mapping.payload) {
    case 'senml':
      return decodeSenml(message, mapping.entries)
    case 'json':
      return decodeJson(message, mapping.entries)
    case 'number':
      return decodeNumber(message, mapping.entries)
    case 'sparkplug':
      return {
        found: [],
        complaints: [
          {
            code: 'not-spoken',
            field: 'topic',
            value: message.topic,
            problem: 'Sparkplug B is not spoken yet',
            remedy: 'let the gateway send SenML in JSON, and declare "payload": "senml"',
          },
        ],
      }
  }
}

/** Where a topic carries several payloads, its first byte tells (protocols.md §1.3). */
const chosen = (message: Message, mappings: readonly Mapping[]): Mapping | undefined => {
  if (mappings.length < 2) return mappings[0]
  const first = String.fromCharCode(message.payload.find((b) => b > 0x20) ?? 0)
  const sniffed = first === '[' ? 'senml' : first === '{' ? 'json' : 'number'
  return mappings.find((m) => m.payload === sniffed) ?? mappings[0]
}

const refuse = (message: Message, code: string, problem: string, remedy: string): Decoded => ({
  readings: [],
  refused: refusedOf(message, [
    {
      code,
      field: code === 'unknown-topic' ? 'topic' : 'payload',
      value: code === 'unknown-topic' ? message.topic : glimpse(message.payload),
      problem,
      remedy,
    },
  ]),
})

/**
 * What a message says: readings as sent, in °C, and what could not be used. It never throws for
 * content; every byte that came is in a reading or in a refusal.
 *
 * @param message   with its receipt time, by the site's clock
 * @param mappings  `mappingsOf(site)`
 */
export const decode = (message: Message, mappings: Mappings): Decoded => {
  const mapping = chosen(message, mappings.of(message.topic, message.broker ?? null))
  if (mapping === undefined)
    return refuse(
      message,
      'unknown-topic',
      'no probe of this site has this topic',
      "correct the topic in the device, or give it to a probe's source in the site file",
    )
  if (message.payload.length > longestPayload_bytes)
    return refuse(
      message,
      'too-large',
      `${message.payload.length} bytes are more than is read (${longestPayload_bytes})`,
      'send fewer records in one message',
    )
  if (message.payload.length === 0)
    return refuse(message, 'empty', 'the message is empty', 'send a payload with a reading')

  const { found, complaints } = byPayload(message, mapping)
  const told = [...complaints]
  const readings = found.map(({ known, found: one, distrust }): Reading => {
    const { reading, complaints: more } = believe(message, known, one)
    told.push(...more)
    return distrust === true ? { ...reading, quality: 'bad' } : reading
  })
  return { readings, refused: refusedOf(message, told) }
}
