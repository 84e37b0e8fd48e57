import { expect, test } from 'vitest'
import { decode } from '../../server/decode/decode.js'
import { mappingProblems, mappingsOf, matches } from '../../server/decode/mappings.js'
import { bytes, receipt_ms, siteOf } from './site.js'

const dev = 'urn:dev:ow:10e2073a01080063'

/** Decodes one payload on one topic for a site of these probes. */
const heard = (
  probes: readonly object[],
  topic: string,
  payload: string | Uint8Array,
  rest: { retain?: boolean; broker?: string; site?: object } = {},
) =>
  decode(
    {
      topic,
      payload: typeof payload === 'string' ? bytes(payload) : payload,
      retain: rest.retain ?? false,
      receivedAt_ms: receipt_ms,
      broker: rest.broker ?? null,
    },
    mappingsOf(siteOf(probes, rest.site)),
  )

const senml = { id: 'P-07', source: { topic: 's/p07', payload: 'senml' } }
const number = { id: 'P-07', source: { topic: 's/p07', payload: 'number' } }
const json = { id: 'P-07', source: { topic: 's/p07', payload: 'json', timeFormat: 'ms' } }

test('the single data point of RFC 8428 §5.1.1 becomes a reading of now', () => {
  expect(heard([senml], 's/p07', `[{"n":"${dev}","u":"Cel","v":23.1}]`)).toEqual({
    readings: [
      {
        probe: 'P-07',
        t_ms: receipt_ms,
        receivedAt_ms: receipt_ms,
        celsius: 23.1,
        seq: -1,
        quality: 'good',
        timeSource: 'receipt',
      },
    ],
    refused: [],
  })
})

test('the collection of RFC 8428 §5.1.6 gives two probes their temperatures, and no humidity', () => {
  const two = [
    { id: 'A', source: { topic: 'gw', payload: 'senml', name: '2001:db8::2/temperature' } },
    { id: 'B', source: { topic: 'gw', payload: 'senml', name: '2001:db8::1/temperature' } },
  ]
  const pack = `[{"bn":"2001:db8::2/","bt":1.320078429e+09,"n":"temperature","u":"Cel","v":25.2},
    {"n":"humidity","u":"%RH","v":30},{"bn":"2001:db8::1/","n":"temperature","u":"Cel","v":12.3},
    {"n":"humidity","u":"%RH","v":67}]`
  const { readings, refused } = heard(two, 'gw', pack)
  expect(refused).toEqual([])
  expect(readings.map((r) => [r.probe, r.celsius, r.t_ms, r.timeSource])).toEqual([
    ['A', 25.2, 1320078429000, 'device'],
    ['B', 12.3, 1320078429000, 'device'],
  ])
})

test('a time below 2²⁸ is relative to receipt (RFC 8428 §4.5.3)', () => {
  const { readings } = heard([senml], 's/p07', '[{"n":"x","u":"Cel","v":1,"t":-90.5}]')
  expect(readings).toMatchObject([{ t_ms: receipt_ms - 90_500, timeSource: 'relative' }])
})

test('kelvin is taken, without noise in the last digits', () => {
  const { readings } = heard([senml], 's/p07', '[{"n":"x","u":"K","v":273.65}]')
  expect(readings).toMatchObject([{ celsius: 0.5, quality: 'good' }])
})

test.each(['degF', 'F', 'Far'])('SenML in %s is refused: the standard has no such unit', (u) => {
  const { readings, refused } = heard([senml], 's/p07', `[{"n":"x","u":"${u}","v":41}]`)
  expect(readings).toEqual([])
  expect(refused).toMatchObject([
    { code: 'not-a-senml-unit', field: '[0].u', value: u, topic: 's/p07' },
  ])
  expect(refused[0]?.remedy).toContain('degF' === u ? '"Cel" or "K"' : 'Cel')
})

test('an unknown SenML name is refused and the known ones are named', () => {
  const named = { id: 'A', source: { topic: 'gw', payload: 'senml', name: 'rack:t1' } }
  const { readings, refused } = heard(
    [named],
    'gw',
    '[{"bn":"rack:","n":"t1","u":"Cel","v":4},{"n":"t9","u":"Cel","v":5}]',
  )
  expect(readings).toMatchObject([{ probe: 'A', celsius: 4 }])
  expect(refused).toMatchObject([{ code: 'unknown-name', field: '[1].n', value: 'rack:t9' }])
  expect(refused[0]?.remedy).toContain('"rack:t1"')
})

test('two temperatures for one nameless probe are refused: nobody may guess', () => {
  const pack = '[{"n":"a","u":"Cel","v":4},{"n":"b","u":"Cel","v":5}]'
  const { readings, refused } = heard([senml], 's/p07', pack)
  expect(readings).toEqual([])
  expect(refused.map((r) => r.code)).toEqual(['ambiguous-name', 'ambiguous-name'])
})

test('a pack with several bad records tells each, and keeps the good ones', () => {
  const pack =
    '[{"n":"x","u":"Cel","v":4},{"n":"x","u":"Cel","vs":"cold"},{"n":"x","u":"degF","v":5},9]'
  const { readings, refused } = heard([senml], 's/p07', pack)
  expect(readings).toMatchObject([{ celsius: 4, quality: 'good' }])
  expect(refused.map((r) => r.code).sort()).toEqual([
    'not-a-number',
    'not-a-record',
    'not-a-senml-unit',
  ])
})

test('a flood of bad records in one message is cut to twenty, the rest counted', () => {
  const pack = JSON.stringify(Array.from({ length: 500 }, () => 7))
  const { refused } = heard([senml], 's/p07', pack)
  expect(refused.length).toBe(20)
  expect(refused.at(-1)).toMatchObject({ code: 'more', value: '500' })
})

test('SenML in CBOR and Sparkplug are refused by name: not spoken yet', () => {
  const cbor = Uint8Array.of(0x81, 0xa3, 0x00, 0x61, 0x61)
  expect(heard([senml], 's/p07', cbor).refused).toMatchObject([
    { code: 'not-spoken', value: 'CBOR' },
  ])
  const plug = {
    id: 'S',
    source: { payload: 'sparkplug', group: 'store', edge: 'gw1', device: 'rack2', metric: 'T/07' },
  }
  expect(heard([plug], 'spBv1.0/store/DDATA/gw1/rack2', 'x').refused).toMatchObject([
    { code: 'not-spoken', field: 'topic' },
  ])
})

test('°F counts where a mapping declares it', () => {
  const declared = { id: 'P', source: { topic: 'old/p3', payload: 'number', unit: 'degF' } }
  expect(heard([declared], 'old/p3', '41').readings).toMatchObject([
    { celsius: 5, quality: 'good' },
  ])
  const inJson = { id: 'P', source: { topic: 'j', payload: 'json', unit: 'degF' } }
  expect(heard([inJson], 'j', '{"value":14}').readings).toMatchObject([{ celsius: -10 }])
})

test('°F sent as °C beyond the range of the probe is kept with quality bad, and told', () => {
  const ranged = { ...number, range_C: [-40, 20] }
  const { readings, refused } = heard([ranged], 's/p07', '41.0')
  expect(readings).toMatchObject([{ celsius: 41, quality: 'bad' }])
  expect(refused).toMatchObject([
    { code: 'looks-like-fahrenheit', value: '41.0', field: 'payload', notice: true },
  ])
  expect(refused[0]?.remedy).toContain('"unit": "degF"')
})

test('41 in a 2–8 °C store is told as likely °F, yet believed: the store may truly be warm', () => {
  const site = {
    products: [
      {
        id: 'vaccine',
        name: 'Vaccine',
        revision: 1,
        source: 'test',
        approvedBy: 'test',
        freezing: { kind: 'water' },
        harm: 'freezing',
        label_C: [2, 8],
        nucleation: 'unknown',
      },
    ],
    containers: [{ id: 'vial', fill_kg: 0.01, UA_W_K: 0.02 }],
    storageUnits: [{ id: 'F', kind: 'refrigerator' }],
    items: [
      {
        id: 'I',
        product: 'vaccine',
        container: 'vial',
        count: 1,
        storageUnit: 'F',
        placedAt: '2026-01-01T00:00:00Z',
      },
    ],
    assignments: [{ probe: 'P-07', to: { storageUnit: 'F' }, from: '2026-01-01T00:00:00Z' }],
  }
  const { readings, refused } = heard([number], 's/p07', '41.0', { site })
  expect(readings).toMatchObject([{ celsius: 41, quality: 'good' }])
  expect(refused).toMatchObject([{ code: 'looks-like-fahrenheit', notice: true }])
  expect(refused[0]?.problem).toContain('5.0 °C')
  expect(heard([number], 's/p07', '12.0', { site }).refused).toEqual([])
})

test.each([
  { sent: '85', code: 'fault-code', why: 'DS18B20 after a reset [common practice]' },
  { sent: '-127.0', code: 'fault-code', why: 'DS18B20 unplugged [common practice]' },
  { sent: '150', code: 'out-of-range', why: 'range_C; as °F it would be out too' },
  { sent: 'NaN', code: 'no-number', why: 'interfaces.md §2' },
  { sent: '1e400', code: 'no-number', why: 'past a double' },
])('$sent is kept with quality bad and told as $code ($why)', ({ sent, code }) => {
  const probe = { ...number, faultCodes_C: [85, -127], range_C: [-50, 60] }
  const { readings, refused } = heard([probe], 's/p07', sent)
  expect(readings).toMatchObject([{ quality: 'bad' }])
  expect(refused).toMatchObject([{ code, notice: true }])
})

test.each(['23.1', ' -4 ', '+.5', '5.', '1e1', '-2.5E+0'])('%j is a plain number', (text) => {
  expect(heard([number], 's/p07', text).readings).toMatchObject([
    { celsius: Number(text), timeSource: 'receipt', t_ms: receipt_ms },
  ])
})

test.each(['0x10', '3,5', '4 C', '4.2.1', 'Infinity', '', 'abc', '1'.repeat(33), '--1', 'e5'])(
  '%j is no plain number',
  (text) => {
    const { readings, refused } = heard([number], 's/p07', text)
    expect(readings).toEqual([])
    expect(refused).toMatchObject([{ field: 'payload' }])
  },
)

test.each([
  { format: 'ms', sent: receipt_ms * 1000, says: 'as microseconds it is 2026-01-05T03:10:00Z' },
  { format: 'ms', sent: receipt_ms / 1000, says: 'as seconds it is 2026-01-05T03:10:00Z' },
  { format: 's', sent: receipt_ms, says: 'as milliseconds it is 2026-01-05T03:10:00Z' },
  { format: 'ms', sent: receipt_ms * 1e6, says: 'as nanoseconds it is 2026-01-05T03:10:00Z' },
  { format: 'rfc3339', sent: receipt_ms, says: 'as milliseconds it is 2026-01-05T03:10:00Z' },
  { format: 's', sent: 3600, says: 'it is 1970-01-01T01:00:00Z' },
  { format: 'rfc3339', sent: '2026-01-05 soon', says: 'not a time as declared' },
  { format: 'rfc3339', sent: '2026-01-05T03:10:00', says: 'not a time as declared' },
  { format: 'ms', sent: true, says: 'not a time as declared' },
])('an impossible time ($format $sent) is kept at its receipt, quality bad: $says', (row) => {
  const probe = { id: 'P', source: { topic: 'j', payload: 'json', timeFormat: row.format } }
  const { readings, refused } = heard([probe], 'j', JSON.stringify({ value: 4, time: row.sent }))
  expect(readings).toMatchObject([
    { celsius: 4, t_ms: receipt_ms, timeSource: 'receipt', quality: 'bad' },
  ])
  expect(refused).toMatchObject([{ code: 'impossible-time', field: '/time', notice: true }])
  expect(refused[0]?.problem).toContain(row.says)
})

test('a SenML time in microseconds is told as such', () => {
  const pack = JSON.stringify([{ n: 'x', u: 'Cel', v: 4, t: receipt_ms * 1000 }])
  const { readings, refused } = heard([senml], 's/p07', pack)
  expect(readings).toMatchObject([{ quality: 'bad', t_ms: receipt_ms }])
  expect(refused[0]?.problem).toContain('as microseconds it is 2026-01-05')
})

test('a clock up to 5 min ahead is believed, one beyond is kept with quality bad', () => {
  const ahead = (ms: number) => heard([json], 's/p07', `{"value":4,"time":${receipt_ms + ms}}`)
  expect(ahead(300_000)).toMatchObject({ readings: [{ quality: 'good' }], refused: [] })
  expect(ahead(300_001)).toMatchObject({
    readings: [{ quality: 'bad', t_ms: receipt_ms + 300_001, timeSource: 'device' }],
    refused: [{ code: 'ahead-of-receipt', notice: true }],
  })
})

test.each([
  ['rfc3339', '2026-01-05T04:10:00.5+01:00', receipt_ms + 500],
  ['iso8601', '20260105T031000Z', receipt_ms],
  ['iso8601', '2026-01-05T03:10Z', receipt_ms],
  ['iso8601', '2026-01-04T22:10:00-0500', receipt_ms],
  ['iso8601', '2026-01-05T04:10:00,25+01', receipt_ms + 250],
  ['rfc3339', '2025-12-31T23:59:60Z', Date.UTC(2025, 11, 31, 23, 59, 59)],
  ['s', receipt_ms / 1000, receipt_ms],
  ['ms', String(receipt_ms), receipt_ms],
])('a time by %s, %s, is understood', (timeFormat, time, t_ms) => {
  const probe = { id: 'P', source: { topic: 'j', payload: 'json', timeFormat } }
  expect(heard([probe], 'j', JSON.stringify({ value: 4, time }))).toMatchObject({
    readings: [{ t_ms, timeSource: 'device', quality: 'good' }],
    refused: [],
  })
})

test('30 February is no day', () => {
  const probe = { id: 'P', source: { topic: 'j', payload: 'json' } }
  expect(heard([probe], 'j', '{"value":4,"time":"2025-02-30T00:00:00Z"}').refused).toMatchObject([
    { code: 'impossible-time' },
  ])
})

test('the example mapping of interfaces.md §1 finds probe, value, time, serial and seq', () => {
  const source = {
    topic: 'gw/+/t',
    payload: 'json',
    value: '/t/0/c',
    time: '/ts',
    timeFormat: 'ms',
    unit: 'Cel',
    probe: '{1}',
    serial: '/sn',
    seq: '/n',
  }
  const probes = [
    { id: 'P-07', serial: 'A1', source },
    { id: 'P-08', serial: 'B2', source },
  ]
  const payload = JSON.stringify({ t: [{ c: -3.12 }], ts: receipt_ms - 1000, sn: 'B2', n: 123 })
  expect(heard(probes, 'gw/P-08/t', payload)).toMatchObject({
    readings: [{ probe: 'P-08', celsius: -3.12, t_ms: receipt_ms - 1000, seq: 123 }],
    refused: [],
  })
  expect(heard(probes, 'gw/P-99/t', payload)).toMatchObject({
    readings: [],
    refused: [{ code: 'unknown-probe', field: 'topic', value: 'P-99' }],
  })
  // Another device under the same name: its calibration is not the one on file.
  expect(heard(probes, 'gw/P-07/t', payload)).toMatchObject({
    readings: [{ probe: 'P-07', quality: 'bad' }],
    refused: [{ code: 'unknown-serial', field: '/sn', value: 'B2', notice: true }],
  })
})

test('probes on one wildcard topic are told apart by serial alone', () => {
  const source = { topic: 'gw/+', payload: 'json', serial: '/sn' }
  const probes = [
    { id: 'A', serial: '1', source },
    { id: 'B', serial: '2', source },
  ]
  expect(heard(probes, 'gw/x', '{"value":5,"sn":2}')).toMatchObject({
    readings: [{ probe: 'B', celsius: 5 }],
    refused: [],
  })
  expect(heard(probes, 'gw/x', '{"value":5,"sn":"3"}')).toMatchObject({
    readings: [],
    refused: [{ code: 'unknown-serial' }],
  })
})

test('two probes share one JSON topic by their pointers, and one may be absent', () => {
  const probes = [
    { id: 'A', source: { topic: 'j', payload: 'json', value: '/a' } },
    { id: 'B', source: { topic: 'j', payload: 'json', value: '/b' } },
  ]
  expect(heard(probes, 'j', '{"a":1,"b":2}').readings.map((r) => [r.probe, r.celsius])).toEqual([
    ['A', 1],
    ['B', 2],
  ])
  expect(heard(probes, 'j', '{"b":2}')).toMatchObject({ readings: [{ probe: 'B' }], refused: [] })
  const none = heard(probes, 'j', '{"c":2}')
  expect(none).toMatchObject({ readings: [], refused: [{ code: 'missing-value', field: '/a' }] })
  expect(none.refused[0]?.remedy).toContain('"/c"')
})

test('a plain number on a topic of two probes is refused, and found when the site is read', () => {
  const probes = [
    { id: 'A', source: { topic: 'n', payload: 'number' } },
    { id: 'B', source: { topic: 'n', payload: 'number' } },
  ]
  expect(heard(probes, 'n', '4')).toMatchObject({
    readings: [],
    refused: [{ code: 'ambiguous-topic' }],
  })
  expect(mappingProblems(siteOf(probes))).toMatchObject([
    { code: 'ambiguous-source', field: 'probes[1].source' },
  ])
})

test.each([
  ['{"value":"4.5"}', { readings: [{ celsius: 4.5 }] }],
  ['{"value":null}', { readings: [{ celsius: null, quality: 'bad' }] }],
  ['{"value":"4,5"}', { readings: [], refused: [{ code: 'not-a-number', field: '/value' }] }],
  ['{"value":true}', { readings: [], refused: [{ code: 'not-a-number' }] }],
  ['{"value":NaN}', { readings: [], refused: [{ code: 'not-json' }] }],
  ['{"value":4', { readings: [], refused: [{ code: 'not-json' }] }],
  ['', { readings: [], refused: [{ code: 'empty' }] }],
])('JSON %s gives what can be kept of it', (payload, result) => {
  expect(heard([json], 's/p07', payload)).toMatchObject(result)
})

test('a sequence number that is none is told, and the reading kept without it', () => {
  const probe = { id: 'P', source: { topic: 'j', payload: 'json', seq: '/n' } }
  expect(heard([probe], 'j', '{"value":4,"n":"x"}')).toMatchObject({
    readings: [{ seq: -1, quality: 'good' }],
    refused: [{ code: 'bad-seq', notice: true }],
  })
})

test('bytes that are not UTF-8 are refused and kept', () => {
  const payload = Uint8Array.of(0x7b, 0xff, 0xfe)
  const { refused } = heard([json], 's/p07', payload)
  expect(refused).toMatchObject([{ code: 'not-utf8' }])
  expect(refused[0]?.payload).toEqual(payload)
})

test('a nest too deep for a parser is refused', () => {
  expect(heard([json], 's/p07', '['.repeat(60_000)).refused).toMatchObject([{ code: 'not-json' }])
})

test('a payload past 64 KiB is refused unread', () => {
  expect(heard([json], 's/p07', 'x'.repeat(64 * 1024 + 1)).refused).toMatchObject([
    { code: 'too-large' },
  ])
})

test('an unknown topic is refused and its payload kept', () => {
  const { readings, refused } = heard([senml], 'nobody/knows', '4.5')
  expect(readings).toEqual([])
  expect(refused).toMatchObject([{ code: 'unknown-topic', field: 'topic', value: 'nobody/knows' }])
  expect(refused[0]?.payload).toEqual(bytes('4.5'))
})

test('a retained copy is last known, not fresh; a bad one stays bad', () => {
  expect(heard([number], 's/p07', '4', { retain: true }).readings).toMatchObject([
    { quality: 'retained' },
  ])
  expect(heard([number], 's/p07', '500', { retain: true }).readings).toMatchObject([
    { quality: 'bad' },
  ])
})

test('a source that names a broker hears that one alone', () => {
  const from = (broker?: string) => ({
    id: 'P',
    source: { topic: 'n', payload: 'number', ...(broker === undefined ? {} : { broker }) },
  })
  expect(heard([from('plant')], 'n', '4', { broker: 'plant' }).readings.length).toBe(1)
  expect(heard([from('plant')], 'n', '4').refused).toMatchObject([{ code: 'unknown-topic' }])
  expect(heard([from()], 'n', '4', { broker: 'other' }).readings.length).toBe(1)
  expect(mappingsOf(siteOf([from('plant')])).filters('plant')).toEqual(['n'])
  expect(mappingsOf(siteOf([from('plant')])).filters('other')).toEqual([])
})

test('one topic with two kinds of payload is told by its first byte', () => {
  const probes = [
    { id: 'A', source: { topic: 'x', payload: 'senml' } },
    { id: 'B', source: { topic: 'x', payload: 'json' } },
    { id: 'C', source: { topic: 'x', payload: 'number' } },
  ]
  expect(heard(probes, 'x', '[{"n":"q","u":"Cel","v":1}]').readings).toMatchObject([{ probe: 'A' }])
  expect(heard(probes, 'x', ' {"value":2}').readings).toMatchObject([{ probe: 'B' }])
  expect(heard(probes, 'x', '3').readings).toMatchObject([{ probe: 'C' }])
})

test.each([
  ['sport/tennis/player1/#', 'sport/tennis/player1', true], // MQTT 3.1.1 §4.7.1.2
  ['sport/tennis/player1/#', 'sport/tennis/player1/score/wimbledon', true],
  ['sport/#', 'sport', true],
  ['#', 'a/b', true],
  ['sport/tennis/+', 'sport/tennis/player1', true], // §4.7.1.3
  ['sport/tennis/+', 'sport/tennis/player1/ranking', false],
  ['sport/+', 'sport', false],
  ['sport/+', 'sport/', true],
  ['+/+', '/finance', true],
  ['/+', '/finance', true],
  ['+', '/finance', false],
  ['#', '$SYS/monitor', false], // §4.7.2
  ['+/monitor', '$SYS/monitor', false],
  ['$SYS/#', '$SYS/monitor', true],
])('filter %s takes %s: %s (MQTT 3.1.1 §4.7)', (filter, topic, takes) => {
  expect(matches(filter, topic)).toBe(takes)
})
