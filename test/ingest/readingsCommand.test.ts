import { execFile } from 'node:child_process'
import { fileURLToPath } from 'node:url'
import { expect, test } from 'vitest'
import { parse } from '../../config/schema/parse.js'
import { ReadingLine, readingOf } from '../../config/schema/reading.js'
import { keepAll, reading, temporaryFolder, testLog } from './intake.js'

const command = fileURLToPath(new URL('../../dist/server/commands/readings.js', import.meta.url))

/** What `npm run -s readings` runs, with its answer. */
const asked = (...argv: string[]) =>
  new Promise<{ code: number; lines: string[]; said: string }>((resolve) => {
    const child = execFile(process.execPath, [command, ...argv], (_error, out, said) => {
      resolve({ code: child.exitCode ?? -1, lines: out.split('\n').filter((l) => l !== ''), said })
    })
  })

const t_ms = Date.UTC(2026, 0, 5, 3, 10)
const stored = [
  reading('P-07', t_ms, -3.12, { seq: 123 }),
  reading('P-07', t_ms, -3.5, { seq: 123 }), // a conflict
  reading('P-08', t_ms + 60_000, null, { quality: 'bad' }),
  reading('P-07', t_ms - 60_000, 4, { timeSource: 'receipt', quality: 'retained' }),
]

test('prints what is stored beside a running server and after it has ended, conflicts among it', async () => {
  const data = temporaryFolder()
  const { log } = await testLog({ data })
  await keepAll(log, stored)
  const running = await asked('--data', data)
  expect(running).toMatchObject({ code: 0, said: '' })
  // Line by line what was sent, in order of arrival.
  expect(running.lines.map((l) => readingOf(parse(ReadingLine, JSON.parse(l))))).toEqual(stored)
  expect(running.lines[0]).toBe(
    '{"probe":"P-07","t":"2026-01-05T03:10:00Z","receivedAt":"2026-01-05T03:10:01Z","celsius":-3.12,"seq":123}',
  )
  await log.close()
  expect(await asked('--data', data)).toEqual(running)
})

test('chooses by probe and by time; the end is not included', async () => {
  const data = temporaryFolder()
  const { log } = await testLog({ data })
  await keepAll(log, stored)
  const count = async (...argv: string[]) => (await asked('--data', data, ...argv)).lines.length
  expect(await count('--probe', 'P-08')).toBe(1)
  expect(await count('--probe', 'nobody')).toBe(0)
  expect(await count('--from', '2026-01-05T03:10:00Z')).toBe(3)
  expect(await count('--until', '2026-01-05T03:10:00Z')).toBe(1)
  expect(
    await count('--from', '2026-01-05T04:10:00+01:00', '--until', '2026-01-05T03:10:01Z'),
  ).toBe(2)
})

test('more than a page comes whole and in order', async () => {
  const data = temporaryFolder()
  const { log } = await testLog({ data })
  await keepAll(
    log,
    Array.from({ length: 2500 }, (_, i) => reading('P', t_ms + i, 4, { seq: i })),
  )
  const { lines } = await asked('--data', data)
  expect(lines.map((l) => (JSON.parse(l) as { seq: number }).seq)).toEqual(
    Array.from({ length: 2500 }, (_, i) => i),
  )
})

test.each([
  { argv: [], says: '--data' },
  { argv: ['--data', '/nowhere/at/all'], says: 'no store in this folder' },
  { argv: ['--data', '.', '--from', 'yesterday'], says: 'write it like 2026-01-05T03:10:00Z' },
  { argv: ['--data', '.', '--prob', 'x'], says: 'npm run -s readings' },
])('$argv ends with 2 and says what to do', async ({ argv, says }) => {
  const { code, lines, said } = await asked(...argv)
  expect({ code, lines }).toEqual({ code: 2, lines: [] })
  expect(said).toContain(says)
  expect(said).not.toMatch(/\n\s+at /)
})
