import type { Known, Mapping } from './mappings.js'
import type { Complaint, Found, Message } from './message.js'
import { at } from './pointer.js'
import { glimpse, jsonOf, numberOfText, textOf } from './text.js'
import { timeOfText } from './time.js'
import { toCelsius } from './unit.js'

type JsonEntry = Extract<Mapping, { payload: 'json' }>['entries'][number]
type NumberEntry = Extract<Mapping, { payload: 'number' }>['entries'][number]
type Result = { found: { known: Known; found: Found }[]; complaints: Complaint[] }

/** `{1}` is level 1 of the topic, counted from 0: in gw/+/t what stands for the `+`. */
const rendered = (template: string, topic: string): string => {
  const levels = topic.split('/')
  return template.replaceAll(/\{(\d+)\}/g, (_, n: string) => levels[Number(n)] ?? '')
}

/** The probes that this message may speak of, by topic part and by serial number. */
const addressed = (
  message: Message,
  json: unknown,
  entries: readonly JsonEntry[],
): { chosen: JsonEntry[]; swapped: JsonEntry | null; complaint: Complaint | null } => {
  const byTopic = entries.filter(({ source, probe }) => {
    if (source.probe === undefined) return true
    const name = rendered(source.probe, message.topic)
    return name === probe.id || name === probe.serial
  })
  if (byTopic.length === 0) {
    const names = new Set(entries.map((e) => rendered(e.source.probe ?? '', message.topic)))
    return {
      chosen: [],
      swapped: null,
      complaint: {
        code: 'unknown-probe',
        field: 'topic',
        value: [...names].join(', '),
        problem: 'the topic names a probe that this site does not have',
        remedy: `known here: ${entries
          .map((e) => `"${e.probe.id}"`)
          .slice(0, 12)
          .join(', ')}; or add the probe to the site file`,
      },
    }
  }
  const serialOf = (e: JsonEntry) => {
    const written = e.source.serial === undefined ? undefined : at(json, e.source.serial)
    return written === undefined || written === null ? null : String(written)
  }
  const isOther = (e: JsonEntry): boolean => {
    const serial = serialOf(e)
    return serial !== null && e.probe.serial !== undefined && serial !== e.probe.serial
  }
  const others = byTopic.filter(isOther)
  const chosen = byTopic.filter((e) => !isOther(e))
  const [other] = others
  if (chosen.length > 0 || other === undefined) return { chosen, swapped: null, complaint: null }
  const complaint: Complaint = {
    code: 'unknown-serial',
    field: other.source.serial ?? '',
    value: serialOf(other),
    problem: 'no probe on this topic has this serial number',
    remedy: `known here: ${others
      .map((e) => `"${e.probe.serial}" (${e.probe.id})`)
      .slice(0, 12)
      .join(', ')}; if the device was changed, enter its serial and calibration in the site file`,
  }
  // One probe it can be: kept with quality bad, since its calibration is that of another device.
  return others.length === 1
    ? { chosen: [], swapped: other, complaint: { ...complaint, notice: true } }
    : { chosen: [], swapped: null, complaint }
}

const timeOf = (written: unknown, format: JsonEntry['source']['timeFormat']): number | null => {
  if (written === undefined || written === null) return null
  if (format === 'rfc3339' || format === 'iso8601')
    return typeof written === 'string' ? (timeOfText(written, format) ?? Number.NaN) : Number.NaN
  const n = typeof written === 'string' ? numberOfText(written) : written
  if (typeof n !== 'number') return Number.NaN
  return Math.round(format === 's' ? n * 1000 : n)
}

const timeFormats = {
  rfc3339: 'RFC 3339 with offset',
  iso8601: 'ISO 8601 with offset',
  s: 'seconds since 1970',
  ms: 'milliseconds since 1970',
} as const

/** @returns the number, null for "none", undefined for something else */
const numberIn = (written: unknown): number | null | undefined =>
  typeof written === 'number' || written === null
    ? written
    : typeof written === 'string'
      ? numberOfText(written)
      : undefined

const foundIn = (
  json: unknown,
  entry: JsonEntry,
): { found: Found | null; complaints: Complaint[] } => {
  const { source, probe } = entry
  const written = at(json, source.value)
  const value = numberIn(written)
  if (value === undefined)
    return {
      found: null,
      complaints: [
        {
          code: 'not-a-number',
          field: source.value,
          value: written,
          problem: `the temperature of probe "${probe.id}" is to be a number`,
          remedy: 'send a JSON number, decimals after a point and no unit behind it',
        },
      ],
    }
  const seqWritten = source.seq === undefined ? undefined : at(json, source.seq)
  const isSeq = Number.isSafeInteger(seqWritten) && (seqWritten as number) >= 0
  const timeWritten = at(json, source.time)
  return {
    found: {
      celsius: value === null ? null : toCelsius(value, source.unit),
      field: source.value,
      written,
      unit: source.unit,
      t_ms: timeOf(timeWritten, source.timeFormat),
      timeFormat: timeFormats[source.timeFormat],
      timeSource: 'device',
      timeField: source.time,
      timeWritten,
      seq: isSeq ? (seqWritten as number) : -1,
    },
    complaints:
      seqWritten === undefined || seqWritten === null || isSeq
        ? []
        : [
            {
              code: 'bad-seq',
              field: source.seq ?? '',
              value: seqWritten,
              problem: 'a sequence number is a whole number from 0',
              remedy: 'correct the device or the pointer; the reading is kept without it',
              notice: true,
            },
          ],
  }
}

/** Temperatures of a JSON document by the pointers that the site file gives (RFC 6901). */
export const decodeJson = (message: Message, entries: readonly JsonEntry[]): Result => {
  const parsed = jsonOf(message.payload)
  if ('complaint' in parsed) return { found: [], complaints: [parsed.complaint] }
  const { json } = parsed
  const { chosen, swapped, complaint } = addressed(message, json, entries)
  const all = swapped === null ? chosen : [swapped]
  const complaints: Complaint[] = complaint === null ? [] : [complaint]
  if (all.length === 0) return { found: [], complaints }

  // A gateway may send some of its sensors at a time; only where none is in it, that is told.
  const present = all.filter((e) => at(json, e.source.value) !== undefined)
  const [first] = all
  if (present.length === 0 && first !== undefined) {
    const keys = typeof json === 'object' && json !== null ? Object.keys(json).slice(0, 12) : []
    complaints.push({
      code: 'missing-value',
      field: first.source.value,
      value: keys,
      problem: `nothing is there in this message for probe "${first.probe.id}"`,
      remedy: `correct "value" in the probe's source; the message has ${keys.map((k) => `"/${k}"`).join(', ') || 'no members'}`,
    })
  }
  const found = present.flatMap((entry) => {
    const one = foundIn(json, entry)
    complaints.push(...one.complaints)
    if (one.found === null) return []
    return [{ known: entry, found: one.found, distrust: swapped !== null }]
  })
  return { found, complaints }
}

/** One plain number, the whole payload. */
export const decodeNumber = (message: Message, entries: readonly NumberEntry[]): Result => {
  const [entry, twin] = entries
  if (entry === undefined) return { found: [], complaints: [] }
  const text = textOf(message.payload)
  const value = text === null ? undefined : numberOfText(text)
  const about = { field: 'payload', value: text?.slice(0, 80) ?? glimpse(message.payload) }
  if (twin !== undefined)
    return {
      found: [],
      complaints: [
        {
          ...about,
          code: 'ambiguous-topic',
          problem: `probes "${entry.probe.id}" and "${twin.probe.id}" share this topic, and a plain number names neither`,
          remedy: 'give each probe a topic of its own in the site file',
        },
      ],
    }
  if (value === undefined)
    return {
      found: [],
      complaints: [
        {
          ...about,
          code: 'not-a-number',
          problem: 'this is not a plain number',
          remedy:
            'send decimals after a point, without unit and at most 32 characters, or declare another payload',
        },
      ],
    }
  const found: Found = {
    celsius: value === null ? null : toCelsius(value, entry.source.unit),
    field: 'payload',
    written: text,
    unit: entry.source.unit,
    t_ms: null,
    timeFormat: '',
    timeSource: 'receipt',
    timeField: '',
    timeWritten: null,
    seq: -1,
  }
  return { found: [{ known: entry, found }], complaints: [] }
}
