import type { Complaint } from './message.js'

/** SenML (RFC 8428 with RFC 9100), the format itself; which record is which probe is `senml.ts`. */

/** A record with its base fields applied. The time stays relative until someone knows "now". */
export type SenmlRecord = {
  /** Place in the pack, for messages. */
  readonly index: number
  readonly name: string
  /** Null where neither u nor bu says one. */
  readonly unit: string | null
  /** One of v, vb, vs, vd; null in a record that has only a sum. */
  readonly value: number | string | boolean | Uint8Array | null
  readonly kind: 'v' | 'vs' | 'vb' | 'vd' | 's'
  /** Integral of the value, unit × seconds; null where there is none. */
  readonly sum: number | null
  /** bt + t, s: below 2²⁸ relative to now, else POSIX. */
  readonly time_s: number
  /** False where neither bt nor t was sent: "now", by default. */
  readonly timed: boolean
  /** The longest time until the next reading, s. */
  readonly updateTime_s: number | null
}

/** Smallest absolute time, s; below it a time is relative to now (RFC 8428 §4.5.3). */
export const absolute_s = 2 ** 28

/** Versions up to the RFC's own. Its example of §5.1.2 bears 5. */
const version = 10
/** Beyond 10 a version is a set of features (RFC 9100): 2¹, 2³ are RFC 8428, 2⁴ secondary units. */
const knownFeatures = 0b11010

const isKnownVersion = (bver: number): boolean =>
  Number.isInteger(bver) &&
  bver >= 1 &&
  bver < 2 ** 31 &&
  (bver <= version || (bver & ~knownFeatures) === 0)

const kinds = {
  bn: 'string',
  bt: 'number',
  bu: 'string',
  bv: 'number',
  bs: 'number',
  bver: 'number',
  n: 'string',
  u: 'string',
  v: 'number',
  vs: 'string',
  vb: 'boolean',
  vd: 'string',
  s: 'number',
  t: 'number',
  ut: 'number',
} as const
type Label = keyof typeof kinds
const labels = Object.keys(kinds) as Label[]
const valueLabels = ['v', 'vs', 'vb', 'vd'] as const

type Fields = {
  [L in Label]?: (typeof kinds)[L] extends 'number'
    ? number
    : (typeof kinds)[L] extends 'string'
      ? string
      : boolean
}

/** RFC 8428 §4.5.1. */
const goodName = /^[A-Za-z0-9][A-Za-z0-9\-:./_]*$/
const base64url = /^[A-Za-z0-9_-]*$/

type Base = { bn: string; bt?: number; bu?: string; bv?: number; bs?: number }

/** What is wrong with the fields of a record, before their values are looked at. */
const wrongField = (record: object, at: string): Complaint | null => {
  for (const label of labels) {
    if (!Object.hasOwn(record, label)) continue
    const value = (record as Record<string, unknown>)[label]
    if (typeof value !== kinds[label])
      return {
        code: 'wrong-type',
        field: `${at}.${label}`,
        value,
        problem: `"${label}" is a ${kinds[label]} in SenML`,
        remedy: `send a JSON ${kinds[label]}`,
      }
  }
  const strange = Object.keys(record).find((key) => key.endsWith('_'))
  return strange === undefined
    ? null
    : {
        code: 'not-understood',
        field: `${at}.${strange}`,
        value: (record as Record<string, unknown>)[strange],
        problem: 'its sender demands that this field be understood (RFC 8428 §4.4)',
        remedy: 'leave the field out, or its last "_"',
      }
}

/** A base field that is not understood spoils all that follows; a regular one its own record. */
const spoilsTheRest = (complaint: Complaint): boolean => /\.b[^.]*$/.test(complaint.field)

const wrongVersion = (records: readonly unknown[]): Complaint | null => {
  const stated = records.flatMap((record, i) =>
    typeof record === 'object' && record !== null && Object.hasOwn(record, 'bver')
      ? [{ i, bver: (record as { bver: unknown }).bver }]
      : [],
  )
  for (const { i, bver } of stated) {
    const field = `[${i}].bver`
    if (typeof bver !== 'number' || !isKnownVersion(bver))
      return {
        code: 'unknown-version',
        field,
        value: bver,
        problem: 'this version of SenML, or a feature of it, is not known here (RFC 9100)',
        remedy: 'send version 10, the default, or leave "bver" out',
      }
    if (bver !== stated[0]?.bver || (i > 0 && stated[0].i > 0 && bver !== version))
      return {
        code: 'mixed-versions',
        field,
        value: bver,
        problem: 'all records of a pack have one version (RFC 8428 §4.4)',
        remedy: 'give "bver" once, in the first record',
      }
  }
  return null
}

const wrongValue = (f: Fields, name: string, at: string): Complaint | null => {
  const present = valueLabels.filter((label) => f[label] !== undefined)
  if (!goodName.test(name))
    return {
      code: 'wrong-name',
      field: `${at}.n`,
      value: name,
      problem:
        name === ''
          ? 'the record has no name: neither "bn" nor "n"'
          : 'a name has letters, digits and - : . / _ only, and begins with a letter or digit',
      remedy: 'name the sensor so, for instance "urn:dev:mac:0024befffe804ff1:temp"',
    }
  if (present.length > 1)
    return {
      code: 'several-values',
      field: at,
      value: present,
      problem: 'a record holds exactly one of "v", "vs", "vb", "vd"',
      remedy: 'send one record for each value',
    }
  if (f.vd !== undefined && !(base64url.test(f.vd) && f.vd.length % 4 !== 1))
    return {
      code: 'not-base64url',
      field: `${at}.vd`,
      value: f.vd,
      problem: 'a data value is base64 with the URL-safe alphabet, without padding',
      remedy: 'encode it as RFC 4648 §5 says',
    }
  return null
}

const bytesOf = (base64: string): Uint8Array =>
  Uint8Array.from(atob(base64.replaceAll('-', '+').replaceAll('_', '/')), (c) => c.charCodeAt(0))

/** One record with a base, or null where it holds base fields alone and so says nothing. */
const resolved = (
  f: Fields,
  base: Base,
  index: number,
): SenmlRecord | { complaint: Complaint } | null => {
  const kind =
    valueLabels.find((label) => f[label] !== undefined) ?? (f.s === undefined ? null : 's')
  if (kind === null) return null
  const name = base.bn + (f.n ?? '')
  const complaint = wrongValue(f, name, `[${index}]`)
  if (complaint !== null) return { complaint }
  const numeric = (): number | null =>
    f.v === undefined && base.bv === undefined ? null : (base.bv ?? 0) + (f.v ?? 0)
  const value =
    kind === 'v' || kind === 's'
      ? numeric()
      : kind === 'vd'
        ? bytesOf(f.vd ?? '')
        : (f[kind] ?? null)
  return {
    index,
    name,
    unit: f.u ?? base.bu ?? null,
    value,
    kind: kind === 's' && value !== null ? 'v' : kind,
    sum: f.s === undefined && base.bs === undefined ? null : (base.bs ?? 0) + (f.s ?? 0),
    time_s: (base.bt ?? 0) + (f.t ?? 0),
    timed: base.bt !== undefined || f.t !== undefined,
    updateTime_s: f.ut ?? null,
  }
}

/**
 * The records of a pack, base fields applied, in the order of the pack. A record that cannot be
 * used is told and left out; its neighbours stay.
 *
 * @param json  a parsed payload; anything
 */
export const resolve = (
  json: unknown,
): { records: readonly SenmlRecord[]; complaints: readonly Complaint[] } => {
  if (!Array.isArray(json))
    return {
      records: [],
      complaints: [
        {
          code: 'not-a-pack',
          field: 'payload',
          value: json,
          problem: 'SenML is an array of records',
          remedy:
            'put the record in "[ ]", or declare "payload": "json" or "number" for this probe',
        },
      ],
    }
  const version = wrongVersion(json)
  if (version !== null) return { records: [], complaints: [version] }

  const records: SenmlRecord[] = []
  const complaints: Complaint[] = []
  const base: Base = { bn: '' }
  for (const [i, record] of json.entries()) {
    if (typeof record !== 'object' || record === null || Array.isArray(record)) {
      complaints.push({
        code: 'not-a-record',
        field: `[${i}]`,
        value: record,
        problem: 'a record of SenML is a JSON object',
        remedy: 'send {"n": …, "u": "Cel", "v": …}',
      })
      continue
    }
    const wrong = wrongField(record, `[${i}]`)
    if (wrong !== null) complaints.push(wrong)
    if (wrong !== null && spoilsTheRest(wrong)) break
    // Types were checked field by field; base fields of a record that is left out still hold.
    const f = ownFields(record)
    if (f.bn !== undefined) base.bn = f.bn
    if (f.bt !== undefined) base.bt = f.bt
    if (f.bu !== undefined) base.bu = f.bu
    if (f.bv !== undefined) base.bv = f.bv
    if (f.bs !== undefined) base.bs = f.bs
    if (wrong !== null) continue
    const found = resolved(f, base, i)
    if (found === null) continue
    if ('complaint' in found) complaints.push(found.complaint)
    else records.push(found)
  }
  return { records, complaints }
}

/** The known fields that a record itself has, of their right type. */
const ownFields = (record: object): Fields =>
  Object.fromEntries(
    labels
      .filter((label) => Object.hasOwn(record, label))
      .map((label) => [label, (record as Record<string, unknown>)[label]] as const)
      .filter(([label, value]) => typeof value === kinds[label]),
  )
