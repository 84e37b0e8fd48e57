import type { Known, Mapping } from './mappings.js'
import type { Complaint, Found, Message } from './message.js'
import { absolute_s, resolve, type SenmlRecord } from './senmlPack.js'
import { jsonOf } from './text.js'
import { toCelsius } from './unit.js'

type Entries = Extract<Mapping, { payload: 'senml' }>['entries']

/** The units of temperature that SenML has (RFC 8428 §12.1; RFC 8798 adds none). */
const temperatureUnits = { Cel: 'Cel', K: 'K' } as const
/** What is sent for °F; SenML has no such unit. */
const fahrenheitUnits = new Set(['degF', 'F', 'Far', '°F', 'fahrenheit', 'Fahrenheit'])

const isTemperature = (unit: string | null): unit is keyof typeof temperatureUnits =>
  unit !== null && Object.hasOwn(temperatureUnits, unit)

/** A CBOR array begins with one of these bytes (RFC 8949 §3: major type 4). */
const looksLikeCbor = (payload: Uint8Array): boolean => {
  const first = payload[0] ?? 0
  return first >= 0x80 && first <= 0x9f
}

/** Records whose unit nobody need convert: what may be a temperature, or was meant as one. */
const mayBeTemperature = (r: SenmlRecord): boolean =>
  isTemperature(r.unit) || (r.unit !== null && fahrenheitUnits.has(r.unit))

/** Which probe a record speaks of. */
const owners = (records: readonly SenmlRecord[], entries: Entries) => {
  const named = new Map(
    entries.flatMap((e) => (e.source.name ? [[e.source.name, e] as const] : [])),
  )
  const nameless = entries.filter((e) => !e.source.name)
  const left = new Set(
    records.filter((r) => mayBeTemperature(r) && !named.has(r.name)).map((r) => r.name),
  )
  const [only] = nameless
  return (name: string): Known | 'unknown' | 'ambiguous' => {
    const entry = named.get(name)
    if (entry !== undefined) return entry
    if (only === undefined) return 'unknown'
    return nameless.length === 1 && left.size === 1 ? only : 'ambiguous'
  }
}

const notFound = (
  why: 'unknown' | 'ambiguous',
  record: SenmlRecord,
  entries: Entries,
): Complaint => {
  const names = entries.flatMap((e) => (e.source.name ? [`"${e.source.name}"`] : [])).slice(0, 12)
  const probes = entries.map((e) => `"${e.probe.id}"`).slice(0, 12)
  return why === 'unknown'
    ? {
        code: 'unknown-name',
        field: `[${record.index}].n`,
        value: record.name,
        problem: 'no probe on this topic has this SenML name',
        remedy: `known here: ${names.join(', ')}; or add a probe with it to the site file`,
      }
    : {
        code: 'ambiguous-name',
        field: `[${record.index}].n`,
        value: record.name,
        problem: `several temperatures came on this topic, and nothing says which is ${probes.join(' or ')}`,
        remedy: `give the probe's source its "name", for instance "name": "${record.name}"`,
      }
}

/** A record of a known probe that is no temperature. */
const wrongUnit = (record: SenmlRecord): Complaint => {
  const field = `[${record.index}].u`
  if (record.unit === null)
    return {
      code: 'no-unit',
      field,
      value: null,
      problem: 'the record has no unit, neither "u" nor "bu"',
      remedy: 'send "u": "Cel", or "K"',
    }
  return fahrenheitUnits.has(record.unit)
    ? {
        code: 'not-a-senml-unit',
        field,
        value: record.unit,
        problem: 'SenML has no degree Fahrenheit (RFC 8428 §12.1, RFC 8798)',
        remedy:
          'send "Cel" or "K"; °F can be declared for "payload": "json" and "number", in the probe\'s source',
      }
    : {
        code: 'not-a-temperature',
        field,
        value: record.unit,
        problem: 'this unit is not one of temperature',
        remedy: 'send "Cel" or "K" under this name, or give the probe another "name"',
      }
}

const notANumber = (record: SenmlRecord): Complaint => ({
  code: 'not-a-number',
  field: `[${record.index}].${record.kind}`,
  value: record.kind === 's' ? record.sum : String(record.value),
  problem:
    record.kind === 's'
      ? 'the record has a sum and no value'
      : `a temperature is a number, "v"; this is "${record.kind}"`,
  remedy: 'send the temperature as "v"',
})

const foundOf = (record: SenmlRecord, message: Message): Found => ({
  celsius: toCelsius(record.value as number, record.unit === 'K' ? 'K' : 'Cel'),
  field: `[${record.index}].v`,
  written: record.value,
  unit: record.unit === 'K' ? 'K' : 'Cel',
  t_ms: !record.timed
    ? null
    : record.time_s < absolute_s
      ? Math.round(message.receivedAt_ms + record.time_s * 1000)
      : Math.round(record.time_s * 1000),
  timeFormat: record.time_s < absolute_s ? 'seconds relative to now' : 'seconds since 1970',
  timeSource: record.time_s < absolute_s ? 'relative' : 'device',
  timeField: `[${record.index}].t`,
  timeWritten: record.time_s,
  seq: -1, // SenML has none
})

/**
 * Temperatures of a SenML pack in JSON (RFC 8428), each with the probe it belongs to. Records of
 * other quantities (humidity, battery) are no concern of ours and are passed over.
 */
export const decodeSenml = (
  message: Message,
  entries: Entries,
): { found: { known: Known; found: Found }[]; complaints: Complaint[] } => {
  if (looksLikeCbor(message.payload))
    return {
      found: [],
      complaints: [
        {
          code: 'not-spoken',
          field: 'payload',
          value: 'CBOR',
          problem: 'SenML in CBOR is not spoken yet',
          remedy: 'send SenML in JSON (application/senml+json)',
        },
      ],
    }
  const parsed = jsonOf(message.payload)
  if ('complaint' in parsed) return { found: [], complaints: [parsed.complaint] }
  const { records, complaints } = resolve(parsed.json)
  const ownerOf = owners(records, entries)

  const found: { known: Known; found: Found }[] = []
  const told: Complaint[] = [...complaints]
  for (const record of records) {
    const owner = ownerOf(record.name)
    if (owner === 'unknown' || owner === 'ambiguous') {
      if (mayBeTemperature(record)) told.push(notFound(owner, record, entries))
      continue
    }
    if (!isTemperature(record.unit)) {
      // A nameless probe's pack may carry its humidity too, under the same name.
      const others = records.some((r) => r.name === record.name && isTemperature(r.unit))
      if (!others || mayBeTemperature(record)) told.push(wrongUnit(record))
      continue
    }
    if (typeof record.value !== 'number') told.push(notANumber(record))
    else found.push({ known: owner, found: foundOf(record, message) })
  }
  if (found.length === 0 && told.length === 0)
    told.push({
      code: 'no-temperature',
      field: 'payload',
      value: records.map((r) => r.name),
      problem: 'no record of this pack is a temperature of a probe on this topic',
      remedy: 'send "u": "Cel" and "v", under the name that the site file gives',
    })
  return { found, complaints: told }
}
