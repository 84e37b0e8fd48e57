import { expect, test } from 'vitest'
import type { SqliteLog } from '../../server/log/sqliteLog.js'
import type { Refused } from '../../server/seam.js'
import { openForReading } from '../../server/store/database.js'
import {
  failAll,
  failOnce,
  heal,
  keepAll,
  noFault,
  reading,
  temporaryFolder,
  testLog,
} from '../ingest/intake.js'

const refused: Refused = {
  receivedAt_ms: 1,
  topic: 't',
  payload: Uint8Array.of(1, 2, 3),
  code: 'not-json',
  field: 'payload',
  value: '',
  problem: 'p',
  remedy: 'r',
}

/** A small run that touches every table; what is left of it must not depend on what failed. */
const smallRun = async (log: SqliteLog) => {
  const readings = (probe: string) =>
    Array.from({ length: 3 }, (_, i) => reading(probe, 1e12 + i, i))
  await Promise.all([
    keepAll(log, readings('A')),
    keepAll(log, [...readings('B'), reading('B', 1e12, 9), reading('B', 1e12, 9)]),
    log.append([{ part: 1, reading: reading('A', 1e12 + 9, 4) }], [refused, refused]),
    log.save(0, 3, '0.1.0', 1, { some: 'state' }),
    log.apply({
      estimates: [{ item: 'I', t_ms: 1e12, temperature_C: 4, u_K: 0.1, margin_K: 1 }],
      meta: { clock: 'x' },
    }),
  ])
  await keepAll(log, [...readings('A'), reading('C', 1e12, null)])
}

const contents = (data: string) => {
  const db = openForReading(data)
  const tables = ['reading', 'further_reading', 'refused', 'raw_payload', 'probe', 'item']
  const rest = ['snapshot', 'estimate', 'counter', 'meta']
  const rows = [...tables, ...rest].map((table) => [
    table,
    // The disk's own question is no part of what was asked to be kept.
    db
      .prepare(`SELECT * FROM ${table}`)
      .all()
      .filter((r) => !JSON.stringify(r).includes('disk asked')),
  ])
  const sound = db.pragma('integrity_check', { simple: true })
  db.close()
  return { rows: Object.fromEntries(rows) as Record<string, object[]>, sound }
}

test('the n-th write failing, for every n of a small run, loses and doubles nothing', async () => {
  const undisturbed = temporaryFolder()
  const { log } = await testLog({ data: undisturbed })
  await smallRun(log)
  await log.close()
  const wanted = contents(undisturbed)
  expect(wanted.rows.reading?.length).toBe(8)

  let failed = 0
  for (let n = 0; ; n++) {
    const data = temporaryFolder()
    const fault = noFault()
    failOnce(fault, n)
    const run = await testLog({ data, fault })
    await smallRun(run.log)
    expect(run.log.outage()).toBeNull()
    await run.log.close()
    expect(contents(data)).toEqual(wanted)
    if (fault[0] === 1) break // the run was over before the n-th write
    failed += 1
  }
  expect(failed).toBeGreaterThan(15)
})

test('an outage is told once, and once when it is over; what waited is then kept in order', async () => {
  const fault = noFault()
  const { log, nextOutage } = await testLog({ fault })
  failAll(fault)
  const away = nextOutage()
  const all = Array.from({ length: 1200 }, (_, i) => keepAll(log, [reading('P', 1e12 + i, i)]))
  const outage = await away
  expect(outage?.message).toContain('the disk takes no more')
  const back = nextOutage()
  heal(fault)
  expect(await back).toBeNull()
  const kept = (await Promise.all(all)).flat()
  expect(kept.map((r) => r.offset)).toEqual(Array.from({ length: 1200 }, (_, i) => i + 1))
})

test('what was turned away is not in the log, and the log recovers though nobody asks it to', async () => {
  const fault = noFault()
  const { log, nextOutage } = await testLog({ fault, patience_ms: 1 })
  failAll(fault)
  const away = nextOutage()
  await expect(keepAll(log, [reading('P', 1e12, 4)])).rejects.toMatchObject({
    name: 'Outage',
    part: 'disk',
  })
  await away
  const back = nextOutage()
  heal(fault)
  expect(await back).toBeNull()
  expect(log.read(0, 0, 10)).toEqual([])
  expect((await keepAll(log, [reading('P', 1e12, 4)])).map((r) => r.kept)).toEqual(['new'])
})

test('a log with an absent disk closes, and says what it could not keep', async () => {
  const fault = noFault()
  const { log, nextOutage } = await testLog({ fault })
  failAll(fault)
  const away = nextOutage()
  const one = keepAll(log, [reading('P', 1e12, 4)]).catch((error: unknown) => error)
  await away
  await log.close()
  expect(await one).toMatchObject({ name: 'Outage' })
})

test('more than the queue may hold is turned away at once', async () => {
  const fault = noFault()
  const { log, nextOutage } = await testLog({ fault })
  failAll(fault)
  const away = nextOutage()
  const first = keepAll(log, [reading('P', 1e12, 4)])
  await away
  const many = Array.from({ length: 60_000 }, (_, i) => reading('P', 1e12 + 1 + i, 4))
  const second = keepAll(log, many)
  await expect(keepAll(log, many)).rejects.toMatchObject({ name: 'Outage' })
  heal(fault)
  await Promise.all([first, second])
  expect(log.counts().readings).toBe(60_001)
})
