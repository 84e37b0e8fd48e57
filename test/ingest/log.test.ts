import { writeFileSync } from 'node:fs'
import { join } from 'node:path'
import fc from 'fast-check'
import { expect, test } from 'vitest'
import type { Reading } from '../../config/schema/reading.js'
import type { Refused } from '../../server/seam.js'
import { migrate, openForReading, openForWriting } from '../../server/store/database.js'
import { openReader } from '../../server/store/reader.js'
import { keepAll, reading, temporaryFolder, testLog } from './intake.js'

const refusal = (over: Partial<Refused> = {}): Refused => ({
  receivedAt_ms: 1,
  topic: 'a/b',
  payload: new TextEncoder().encode('{"x":1}'),
  code: 'not-json',
  field: 'payload',
  value: 'x',
  problem: 'p',
  remedy: 'r',
  ...over,
})

test('what is appended is on disk when append resolves', async () => {
  const data = temporaryFolder()
  const { log } = await testLog({ data })
  const [kept] = await keepAll(log, [reading('P', 1e12, -3.12, { seq: 7 })])
  expect(kept).toMatchObject({ kept: 'new', offset: 1, part: 0 })
  const other = openReader(data)
  expect(other.read(0, 0, 10)).toEqual([kept])
  other.close()
})

test('the same key and value again is a duplicate, another value a conflict; both are counted', async () => {
  const { log } = await testLog()
  const a = reading('P', 1e12, 4)
  const b = reading('P', 1e12, 5)
  expect((await keepAll(log, [a, a, b])).map((r) => r.kept)).toEqual([
    'new',
    'duplicate',
    'conflict',
  ])
  expect((await keepAll(log, [b, a])).map((r) => r.kept)).toEqual(['duplicate', 'duplicate'])
  expect(log.counts()).toMatchObject({ readings: 2, duplicates: 3, conflicts: 1 })
  expect(log.read(0, 0, 10).map((r) => [r.celsius, r.kept])).toEqual([
    [4, 'new'],
    [5, 'conflict'],
  ])
})

test('another sequence number is another reading', async () => {
  const { log } = await testLog()
  const kept = await keepAll(log, [
    reading('P', 1e12, 4, { seq: 1 }),
    reading('P', 1e12, 5, { seq: 2 }),
    reading('Q', 1e12, 6, { seq: 1 }),
  ])
  expect(kept.map((r) => r.kept)).toEqual(['new', 'new', 'new'])
})

test('law: in whatever order readings come, the same values are kept and the same keys conflict', async () => {
  const { log } = await testLog()
  let run = 0
  const given = fc.array(
    fc.record({
      t: fc.nat(3),
      seq: fc.integer({ min: -1, max: 0 }),
      celsius: fc.constantFrom(1, 2, null),
      quality: fc.constantFrom('good', 'retained') as fc.Arbitrary<Reading['quality']>,
    }),
    { maxLength: 12 },
  )
  const twoOrders = given.chain((all) =>
    fc.tuple(fc.constant(all), fc.shuffledSubarray(all, { minLength: all.length })),
  )
  await fc.assert(
    fc.asyncProperty(twoOrders, async ([one, other]) => {
      run += 1
      const end = async (probe: string, order: typeof one) => {
        const readings = order.map(({ t, celsius, seq, quality }) =>
          reading(probe, 1e12 + t, celsius, { seq, quality }),
        )
        await keepAll(log, readings)
        const all = log.reader.page({ probe, from_ms: null, until_ms: null }, 0, 1000)
        const keys = new Map<string, Set<number | null>>()
        for (const r of all) {
          // A retained copy beside the live value says nothing that is not there already.
          const key = `${r.t_ms} ${r.seq}`
          keys.set(key, (keys.get(key) ?? new Set()).add(r.celsius))
        }
        const conflicts = new Set(
          all.filter((r) => r.kept === 'conflict').map((r) => `${r.t_ms} ${r.seq}`),
        )
        const live = new Set(
          all.filter((r) => r.quality === 'good').map((r) => `${r.t_ms} ${r.seq} ${r.celsius}`),
        )
        return {
          values: [...keys].map(([k, v]) => [k, [...v].map(String).sort()] as const).sort(),
          conflicts: [...conflicts].sort(),
          live: [...live].sort(),
        }
      }
      expect(await end(`${run}a`, one)).toEqual(await end(`${run}b`, other))
    }),
    { numRuns: 60, seed: 20260105 },
  )
})

test('a live reading after its retained copy is new: the copy could bear on nothing', async () => {
  const { log } = await testLog()
  const live = reading('P', 1e12, 4)
  const copy = { ...live, quality: 'retained' as const }
  expect((await keepAll(log, [copy, live, copy, live])).map((r) => r.kept)).toEqual([
    'new',
    'new',
    'duplicate',
    'duplicate',
  ])
  expect(log.counts().conflicts).toBe(0)
})

test('two messages stamped by receipt in one millisecond are two readings, no conflict', async () => {
  const { log } = await testLog()
  const at = (celsius: number) => reading('P', 1e12, celsius, { timeSource: 'receipt' })
  const kept = await keepAll(log, [at(4), at(5), at(6)])
  expect(kept.map((r) => [r.kept, r.t_ms])).toEqual([
    ['new', 1e12],
    ['new', 1e12 + 1],
    ['new', 1e12 + 2],
  ])
})

test('offsets rise over a restart and readings come back in order, partition by partition', async () => {
  const data = temporaryFolder()
  const first = await testLog({ data })
  await first.log.append(
    [
      { part: 3, reading: reading('P', 1e12, 1) },
      { part: 9, reading: reading('Q', 1e12, 2) },
    ],
    [],
  )
  await first.log.close()
  const second = await testLog({ data })
  await second.log.append([{ part: 3, reading: reading('P', 1e12, 7) }], [])
  await second.log.append([{ part: 3, reading: reading('P', 1e12 - 5000, 3) }], [])
  expect(second.log.read(3, 0, 10).map((r) => [r.offset, r.celsius, r.kept])).toEqual([
    [1, 1, 'new'],
    [3, 7, 'conflict'],
    [4, 3, 'new'],
  ])
  expect(second.log.read(3, 1, 1).map((r) => r.offset)).toEqual([3])
  expect(second.log.reader.readAll(0, 10).map((r) => r.offset)).toEqual([1, 2, 3, 4])
  expect(second.log.counts()).toMatchObject({ readings: 4, conflicts: 1 })
})

test('refusals come back with their bytes, newest first; a repeated payload is stored once', async () => {
  const data = temporaryFolder()
  const { log } = await testLog({ data })
  await log.append([], [refusal(), refusal({ code: 'unknown-topic' })])
  await log.append([], [refusal({ notice: true, payload: Uint8Array.of(0, 255) })])
  expect(log.reader.refused(2).map((r) => [r.code, [...r.payload], r.notice])).toEqual([
    ['not-json', [0, 255], true],
    ['unknown-topic', [...new TextEncoder().encode('{"x":1}')], undefined],
  ])
  expect(log.counts()).toMatchObject({
    refused: 2,
    notices: 1,
    refusedByCode: { 'not-json': 2, 'unknown-topic': 1 },
  })
  const db = openForReading(data)
  expect(db.prepare('SELECT count(*) FROM raw_payload').pluck().get()).toBe(2)
  db.close()
})

test('a snapshot replaces the last one and never goes back', async () => {
  const { log } = await testLog()
  expect(log.load(3)).toBeNull()
  await log.save(3, 10, '0.1.0', 1, { item: 'B2' })
  await log.save(3, 9, '0.1.0', 1, { item: 'old' })
  expect(log.load(3)).toEqual({
    offset: 10,
    model: '0.1.0',
    configRevision: 1,
    state: { item: 'B2' },
  })
})

test('estimates are written once however often they are reckoned again', async () => {
  const { log } = await testLog()
  const at = (t_ms: number, temperature_C: number) => ({
    item: 'B2',
    t_ms,
    temperature_C,
    u_K: 0.2,
    margin_K: 1,
  })
  await log.apply({ estimates: [at(1e12, 4), at(1e12 + 7_200_000, 5)] })
  await log.apply({ estimates: [at(1e12, 99)], meta: { clock: 'x' } })
  expect(log.reader.estimates('B2', null, null, 100)).toEqual([
    [1e12, 4, 0.2, 1],
    [1e12 + 7_200_000, 5, 0.2, 1],
  ])
  expect(log.reader.estimates('B2', 1e12 + 1, null, 100).length).toBe(1)
  expect(log.reader.estimates('nothing', null, null, 100)).toEqual([])
  expect(log.reader.meta('clock')).toBe('x')
  expect(log.reader.meta('none')).toBeNull()
})

test('the points of a probe keep their extremes when they are thinned', async () => {
  const { log } = await testLog()
  const minute_ms = 60_000
  const all = Array.from({ length: 3000 }, (_, i) =>
    reading('P', 1e12 + i * minute_ms, i === 1234 ? -9 : i === 2345 ? 19 : 4 + (i % 3)),
  )
  await keepAll(log, all)
  const points = log.reader.points('P', null, null, 200)
  expect(points.length).toBeLessThanOrEqual(202)
  expect(points.map((p) => p[1])).toEqual(expect.arrayContaining([-9, 19]))
  const hour = log.reader.points('P', 1e12 + 60 * minute_ms, 1e12 + 120 * minute_ms, 1000)
  expect(hour.length).toBe(60)
  expect(log.reader.points('Q', null, null, 200)).toEqual([])
})

test('a reading that breaks the store by a fault of ours fails alone', async () => {
  const { log } = await testLog()
  const results = await Promise.allSettled([
    keepAll(log, [reading('P', 1e12, 1)]),
    keepAll(log, [reading('P', 1e12 + 0.5, 2)]),
    keepAll(log, [reading('P', 1e12 + 1, 3)]),
  ])
  expect(results.map((r) => r.status)).toEqual(['fulfilled', 'rejected', 'fulfilled'])
  expect(log.read(0, 0, 10).map((r) => r.celsius)).toEqual([1, 3])
  expect(log.outage()).toBeNull()
})

test('a folder is held by one server at a time', async () => {
  const data = temporaryFolder()
  const { log } = await testLog({ data })
  await expect(testLog({ data })).rejects.toMatchObject({ code: 'in-use', field: 'data' })
  await log.close()
  const again = await testLog({ data })
  expect(again.log.counts().readings).toBe(0)
})

test('a store of a later program is refused, not touched', async () => {
  const data = temporaryFolder()
  const db = openForWriting(data)
  db.pragma('user_version = 999')
  db.close()
  await expect(testLog({ data })).rejects.toMatchObject({ code: 'newer-store' })
})

test('a folder that is none, and a file that is no store, are refused by name', async () => {
  const folder = temporaryFolder()
  const file = join(folder, 'file')
  writeFileSync(file, 'not a database, but long enough to be looked at as one'.repeat(100))
  expect(() => openForWriting(file)).toThrow(expect.objectContaining({ code: 'unusable-folder' }))
  writeFileSync(join(folder, 'hoarline.sqlite'), 'not a database at all'.repeat(300))
  expect(() => openForWriting(folder)).toThrow(
    expect.objectContaining({ code: 'unusable-folder', field: 'data', value: folder }),
  )
  expect(() => openReader(join(folder, 'none'))).toThrow(
    expect.objectContaining({ code: 'no-store' }),
  )
})

test('a migration that breaks off leaves the old shape and its number', () => {
  const db = openForWriting(temporaryFolder())
  const before = db.pragma('user_version', { simple: true }) as number
  const steps = [...Array.from({ length: before }, () => ''), 'CREATE TABLE next (x); SELECT oops;']
  expect(() => migrate(db, steps)).toThrow()
  expect(db.pragma('user_version', { simple: true })).toBe(before)
  expect(db.prepare("SELECT count(*) FROM sqlite_master WHERE name = 'next'").pluck().get()).toBe(0)
  db.close()
})
