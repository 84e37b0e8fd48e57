import fc from 'fast-check'
import { expect, test } from 'vitest'
import { decode } from '../../server/decode/decode.js'
import { mappingsOf } from '../../server/decode/mappings.js'
import type { Decoded } from '../../server/decode/message.js'
import { nightly } from '../needs.js'
import { bytes, receipt_ms, siteOf } from './site.js'

const numRuns = nightly ? 1_000_000 : 100_000
const limit_ms = nightly ? 900_000 : 120_000

const probe = { faultCodes_C: [85, -127] }
const mappings = mappingsOf(
  siteOf([
    { ...probe, id: 'S1', source: { topic: 'senml', payload: 'senml', name: 'rack:t1' } },
    { ...probe, id: 'S2', source: { topic: 'senml', payload: 'senml' } },
    {
      ...probe,
      id: 'J',
      serial: 'A1',
      source: {
        topic: 'json',
        payload: 'json',
        value: '/t/0/c',
        time: '/ts',
        timeFormat: 'ms',
        serial: '/sn',
        seq: '/n',
      },
    },
    { ...probe, id: 'N', source: { topic: 'number', payload: 'number', unit: 'degF' } },
  ]),
)

const seeds = {
  senml: [
    '[{"bn":"rack:","bt":1767582600,"bu":"Cel","n":"t1","v":4.5},{"n":"t2","t":-60,"v":-3.25}]',
    '[{"n":"x","u":"K","v":273.15,"s":12,"ut":60},{"bver":26,"n":"rack:t1","u":"Cel","bv":1,"v":2}]',
  ],
  json: [
    '{"t":[{"c":-3.12}],"ts":1767582599000,"sn":"A1","n":123}',
    '{"t":[{"c":"4.5"}],"ts":null,"sn":7}',
  ],
  number: ['41.0', '-1.5e1', 'NaN'],
} as const

/** Bytes changed, cut, doubled and put in, as lines and devices do it. */
const mutated = (text: string): fc.Arbitrary<Uint8Array> =>
  fc
    .array(
      fc.record({
        at: fc.nat(text.length),
        how: fc.constantFrom('set', 'cut', 'put', 'double'),
        byte: fc.oneof(fc.nat(255), fc.constantFrom(...bytes('"[]{}:,-+.eE0123456789_\\'))),
      }),
      { maxLength: 6 },
    )
    .map((changes) => {
      let out = [...bytes(text)]
      for (const { at, how, byte } of changes) {
        const i = Math.min(at, out.length)
        if (how === 'set') out[i] = byte
        else if (how === 'cut') out = out.slice(0, i)
        else if (how === 'put') out.splice(i, 0, byte)
        else out.splice(i, 0, ...out.slice(i, i + 20))
      }
      return Uint8Array.from(out)
    })

const lawful = ({ readings, refused }: Decoded) => {
  expect(readings.length + refused.length).toBeGreaterThan(0)
  for (const r of readings) {
    if (r.celsius !== null && !Number.isFinite(r.celsius)) throw new Error('not finite')
    if (!Number.isSafeInteger(r.t_ms) || !Number.isSafeInteger(r.seq)) throw new Error('no integer')
    if (r.quality !== 'good') continue
    if (r.celsius === null || r.celsius < -273.15 || r.celsius > 200)
      throw new Error(`${r.celsius} °C was believed`)
    if (r.t_ms > receipt_ms + 300_000) throw new Error('a time of tomorrow was believed')
  }
  for (const r of refused)
    if (r.code === '' || r.field === '' || r.problem === '' || r.remedy === '')
      throw new Error('a refusal without its reason')
}

const hear = (topic: string, payload: Uint8Array) =>
  lawful(
    decode({ topic, payload, retain: false, receivedAt_ms: receipt_ms, broker: null }, mappings),
  )

test.each(['senml', 'json', 'number'] as const)(
  'no mutation of a %s payload throws, and what is believed is a temperature',
  (topic) => {
    const payload = fc.constantFrom(...seeds[topic]).chain(mutated)
    fc.assert(
      fc.property(payload, (bytes) => hear(topic, bytes)),
      { numRuns, seed: 20260105 },
    )
  },
  limit_ms,
)

test(
  'no JSON whatever throws',
  () => {
    fc.assert(
      fc.property(fc.constantFrom('senml', 'json', 'number'), fc.json(), (topic, json) =>
        hear(topic, bytes(json)),
      ),
      { numRuns: numRuns / 10, seed: 20260105 },
    )
  },
  limit_ms,
)

test(
  'no record of SenML fields throws, whatever is in them',
  () => {
    const field = fc.oneof(
      fc.double(),
      fc.string({ maxLength: 8 }),
      fc.boolean(),
      fc.constantFrom('Cel', 'K', 'rack:t1', 1e308, -1e308, null),
    )
    const labels = ['bn', 'bt', 'bu', 'bv', 'bs', 'bver', 'n', 'u', 'v', 'vs', 'vb', 'vd', 's', 't']
    const record = fc.dictionary(fc.constantFrom(...labels, 'ut', 'x_'), field, { maxKeys: 6 })
    fc.assert(
      fc.property(fc.array(record, { maxLength: 6 }), (pack) =>
        hear('senml', bytes(JSON.stringify(pack))),
      ),
      { numRuns: numRuns / 10, seed: 20260105 },
    )
  },
  limit_ms,
)
