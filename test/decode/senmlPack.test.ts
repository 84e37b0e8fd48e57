import { expect, test } from 'vitest'
import { resolve } from '../../server/decode/senmlPack.js'

const rfc = 'RFC 8428'
const dev = 'urn:dev:ow:10e2073a01080063'

/** Name, unit, value, time as the RFC resolves them. */
type Row = readonly [string, string | null, unknown, number]

const examples: { where: string; pack: string; rows: readonly Row[] }[] = [
  {
    where: `${rfc} §5.1.1, a single data point`,
    pack: `[{"n":"${dev}","u":"Cel","v":23.1}]`,
    rows: [[dev, 'Cel', 23.1, 0]],
  },
  {
    where: `${rfc} §5.1.2, voltage and current "now"`,
    pack: `[{"bn":"${dev}:","n":"voltage","u":"V","v":120.1},{"n":"current","u":"A","v":1.2}]`,
    rows: [
      [`${dev}:voltage`, 'V', 120.1, 0],
      [`${dev}:current`, 'A', 1.2, 0],
    ],
  },
  {
    where: `${rfc} §5.1.2, with a base time and version 5`,
    pack: `[{"bn":"urn:dev:ow:10e2073a0108006:","bt":1.276020076001e+09,"bu":"A","bver":5,
      "n":"voltage","u":"V","v":120.1},{"n":"current","t":-5,"v":1.2},{"n":"current","t":-4,"v":1.3},
      {"n":"current","t":-3,"v":1.4},{"n":"current","t":-2,"v":1.5},{"n":"current","t":-1,"v":1.6},
      {"n":"current","v":1.7}]`,
    rows: [
      ['urn:dev:ow:10e2073a0108006:voltage', 'V', 120.1, 1276020076.001],
      ['urn:dev:ow:10e2073a0108006:current', 'A', 1.2, 1276020071.001],
      ['urn:dev:ow:10e2073a0108006:current', 'A', 1.3, 1276020072.001],
      ['urn:dev:ow:10e2073a0108006:current', 'A', 1.4, 1276020073.001],
      ['urn:dev:ow:10e2073a0108006:current', 'A', 1.5, 1276020074.001],
      ['urn:dev:ow:10e2073a0108006:current', 'A', 1.6, 1276020075.001],
      ['urn:dev:ow:10e2073a0108006:current', 'A', 1.7, 1276020076.001],
    ],
  },
  {
    where: `${rfc} §5.1.2, humidity every 10 s`,
    pack: `[{"bn":"${dev}","bt":1.320067464e+09,"bu":"%RH","v":21.2},{"t":10,"v":21.3},
      {"t":20,"v":21.4},{"t":30,"v":21.4},{"t":40,"v":21.5},{"t":50,"v":21.5},{"t":60,"v":21.5},
      {"t":70,"v":21.6},{"t":80,"v":21.7}]`,
    rows: [21.2, 21.3, 21.4, 21.4, 21.5, 21.5, 21.5, 21.6, 21.7].map(
      (v, i): Row => [dev, '%RH', v, 1320067464 + 10 * i],
    ),
  },
  {
    where: `${rfc} §5.1.3, resolved as §5.1.4 prints it`,
    pack: `[{"bn":"${dev}","bt":1.320067464e+09,"bu":"%RH","v":20},{"u":"lon","v":24.30621},
      {"u":"lat","v":60.07965},{"t":60,"v":20.3},{"u":"lon","t":60,"v":24.30622},
      {"u":"lat","t":60,"v":60.07965},{"t":120,"v":20.7},{"u":"lon","t":120,"v":24.30623},
      {"u":"lat","t":120,"v":60.07966},{"u":"%EL","t":150,"v":98},{"t":180,"v":21.2},
      {"u":"lon","t":180,"v":24.30628},{"u":"lat","t":180,"v":60.07967}]`,
    rows: [
      [dev, '%RH', 20, 1320067464],
      [dev, 'lon', 24.30621, 1320067464],
      [dev, 'lat', 60.07965, 1320067464],
      [dev, '%RH', 20.3, 1320067524],
      [dev, 'lon', 24.30622, 1320067524],
      [dev, 'lat', 60.07965, 1320067524],
      [dev, '%RH', 20.7, 1320067584],
      [dev, 'lon', 24.30623, 1320067584],
      [dev, 'lat', 60.07966, 1320067584],
      [dev, '%EL', 98, 1320067614],
      [dev, '%RH', 21.2, 1320067644],
      [dev, 'lon', 24.30628, 1320067644],
      [dev, 'lat', 60.07967, 1320067644],
    ],
  },
  {
    where: `${rfc} §5.1.5, four data types`,
    pack: `[{"bn":"${dev}:","n":"temp","u":"Cel","v":23.1},{"n":"label","vs":"Machine Room"},
      {"n":"open","vb":false},{"n":"nfv-reader","vd":"aGkgCg"}]`,
    rows: [
      [`${dev}:temp`, 'Cel', 23.1, 0],
      [`${dev}:label`, null, 'Machine Room', 0],
      [`${dev}:open`, null, false, 0],
      [`${dev}:nfv-reader`, null, Uint8Array.of(0x68, 0x69, 0x20, 0x0a), 0],
    ],
  },
  {
    where: `${rfc} §5.1.6, the base time survives a new base name`,
    pack: `[{"bn":"2001:db8::2/","bt":1.320078429e+09,"n":"temperature","u":"Cel","v":25.2},
      {"n":"humidity","u":"%RH","v":30},{"bn":"2001:db8::1/","n":"temperature","u":"Cel","v":12.3},
      {"n":"humidity","u":"%RH","v":67}]`,
    rows: [
      ['2001:db8::2/temperature', 'Cel', 25.2, 1320078429],
      ['2001:db8::2/humidity', '%RH', 30, 1320078429],
      ['2001:db8::1/temperature', 'Cel', 12.3, 1320078429],
      ['2001:db8::1/humidity', '%RH', 67, 1320078429],
    ],
  },
  {
    where: `${rfc} §5.1.7, a record of base fields alone says nothing`,
    pack: `[{"bn":"${dev}:"},{"n":"temp","u":"Cel","v":23.1},{"n":"heat","u":"/","v":1},
      {"n":"fan","u":"/","v":0}]`,
    rows: [
      [`${dev}:temp`, 'Cel', 23.1, 0],
      [`${dev}:heat`, '/', 1, 0],
      [`${dev}:fan`, '/', 0, 0],
    ],
  },
  {
    where: `${rfc} §5.1.7, two lights on at one time`,
    pack: `[{"bt":1.320078429e+09,"bu":"/","n":"2001:db8::3","v":1},{"n":"2001:db8::4","v":1}]`,
    rows: [
      ['2001:db8::3', '/', 1, 1320078429],
      ['2001:db8::4', '/', 1, 1320078429],
    ],
  },
  {
    where: `${rfc} §5.1.7, lights dimmed, then off 100 ms later`,
    pack: `[{"bt":1.320078429e+09,"bu":"/","n":"2001:db8::3","v":0.5},{"n":"2001:db8::4","v":0.5},
      {"n":"2001:db8::3","t":0.1,"v":0},{"n":"2001:db8::4","t":0.1,"v":0}]`,
    rows: [
      ['2001:db8::3', '/', 0.5, 1320078429],
      ['2001:db8::4', '/', 0.5, 1320078429],
      ['2001:db8::3', '/', 0, 1320078429.1],
      ['2001:db8::4', '/', 0, 1320078429.1],
    ],
  },
]

test.each(examples)('resolves $where', ({ pack, rows }) => {
  const { records, complaints } = resolve(JSON.parse(pack))
  expect(complaints).toEqual([])
  expect(records.map((r) => [r.name, r.unit, r.value, r.time_s])).toEqual(rows)
})

test('base value and base sum are added, and what is missing counts as zero (RFC 8428 §4.5.4)', () => {
  const pack = [
    { bn: 'x:', bv: 20, bs: 100, n: 'a', v: 3 },
    { n: 'b', s: 5 },
    { n: 'c', v: 1, s: -1 },
  ]
  const { records, complaints } = resolve(pack)
  expect(complaints).toEqual([])
  expect(records.map((r) => [r.name, r.kind, r.value, r.sum])).toEqual([
    ['x:a', 'v', 23, 100],
    ['x:b', 'v', 20, 105],
    ['x:c', 'v', 21, 99],
  ])
})

test('a sum alone is a record without a value', () => {
  expect(resolve([{ n: 'a', u: 'Cel', s: 12 }]).records).toMatchObject([
    { kind: 's', value: null, sum: 12 },
  ])
})

test('the update time is kept', () => {
  expect(resolve([{ n: 'a', v: 1, ut: 600 }]).records).toMatchObject([{ updateTime_s: 600 }])
})

test.each([
  { bver: 1, taken: true },
  { bver: 5, taken: true },
  { bver: 10, taken: true },
  { bver: 26, taken: true }, // 10 + 2⁴, secondary units
  { bver: 11, taken: false },
  { bver: 42, taken: false }, // 10 + 2⁵, a feature nobody has defined
  { bver: 0, taken: false },
  { bver: 10.5, taken: false },
  { bver: '10', taken: false },
])('a pack of version $bver is taken: $taken (RFC 9100)', ({ bver, taken }) => {
  const { records, complaints } = resolve([{ bver, n: 'a', v: 1 }])
  expect(records.length).toBe(taken ? 1 : 0)
  expect(complaints.map((c) => c.code)).toEqual(taken ? [] : ['unknown-version'])
})

test('two versions in one pack are refused', () => {
  const mixed = [
    { bver: 10, n: 'a', v: 1 },
    { bver: 26, n: 'b', v: 1 },
  ]
  const late = [
    { n: 'a', v: 1 },
    { bver: 26, n: 'b', v: 1 },
  ]
  for (const pack of [mixed, late])
    expect(resolve(pack)).toMatchObject({ records: [], complaints: [{ code: 'mixed-versions' }] })
})

test.each([
  { wrong: { n: 'a b', v: 1 }, code: 'wrong-name', field: '[1].n' },
  { wrong: { n: '-a', v: 1 }, code: 'wrong-name', field: '[1].n' },
  { wrong: { v: 1 }, code: 'wrong-name', field: '[1].n' },
  { wrong: { n: 'a', v: 1, vs: 'x' }, code: 'several-values', field: '[1]' },
  { wrong: { n: 'a', v: '1' }, code: 'wrong-type', field: '[1].v' },
  { wrong: { n: 'a', v: null }, code: 'wrong-type', field: '[1].v' },
  { wrong: { n: 'a', vd: 'a+/=' }, code: 'not-base64url', field: '[1].vd' },
  { wrong: { n: 'a', v: 1, secret_: 2 }, code: 'not-understood', field: '[1].secret_' },
  { wrong: 7, code: 'not-a-record', field: '[1]' },
  { wrong: null, code: 'not-a-record', field: '[1]' },
])('one wrong record ($code) is told and its neighbours stay', ({ wrong, code, field }) => {
  const { records, complaints } = resolve([{ n: 'p', v: 1 }, wrong, { n: 'q', v: 2 }])
  expect(complaints).toMatchObject([{ code, field }])
  expect(records.map((r) => r.name)).toEqual(['p', 'q'])
})

test.each([{ bt: 'now' }, { bn: 3 }, { bscale_: 2 }])(
  'a base field that is not understood spoils what follows: %o',
  (wrong) => {
    const { records, complaints } = resolve([{ n: 'p', v: 1 }, wrong, { n: 'q', v: 2 }])
    expect(complaints.length).toBe(1)
    expect(records.map((r) => r.name)).toEqual(['p'])
  },
)

test('fields that are not known are passed over (RFC 8428 §4.4)', () => {
  expect(resolve([{ n: 'a', v: 1, colour: 'red' }])).toMatchObject({
    complaints: [],
    records: [{ value: 1 }],
  })
})

test.each([{}, null, 'x', 3])('what is no array is no pack: %o', (json) => {
  expect(resolve(json)).toMatchObject({ records: [], complaints: [{ code: 'not-a-pack' }] })
})
