import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, describe, expect, test, vi } from 'vitest'
import { Verdict } from '../../config/schema/verdict.js'
import { argumentsOf, main } from '../../server/commands/judge.js'
import { trace } from '../score/traces.js'
import { judged } from './judged.js'

const c = trace(801, 'quiet', 'in-item', true, { interval_s: 300, hours: 4 })
const folder = mkdtempSync(join(tmpdir(), 'hoarline-judge-'))
afterAll(() => rmSync(folder, { recursive: true }))

const file = (name: string, text: string): string => {
  const path = join(folder, name)
  writeFileSync(path, text)
  return path
}

/** The command with what it printed. */
const ran = async (site: string, lines: readonly string[]) => {
  let out = ''
  let complaints = ''
  const stdout = vi
    .spyOn(process.stdout, 'write')
    .mockImplementation((text, ...rest: unknown[]) => {
      out += String(text)
      const written = rest.at(-1)
      if (typeof written === 'function') written()
      return true
    })
  const stderr = vi.spyOn(process.stderr, 'write').mockImplementation((text) => {
    complaints += String(text)
    return true
  })
  const readings = file('readings.jsonl', `${lines.join('\n')}\n`)
  const exit = await main(['--site', file('site.json', site), '--readings', readings]).finally(
    () => {
      stdout.mockRestore()
      stderr.mockRestore()
    },
  )
  return { exit, out, complaints }
}

describe('judge', () => {
  test('every line is a whole verdict, and the same files give the same bytes', async () => {
    const first = await ran(JSON.stringify(c.site), c.lines)
    const second = await ran(JSON.stringify(c.site), c.lines)
    expect(first.exit).toBe(0)
    expect(second.out).toBe(first.out)
    for (const line of first.out.trim().split('\n')) {
      const checked = Verdict.safeParse(JSON.parse(line))
      expect(checked.error?.issues).toBeUndefined()
    }
  })

  test('lines of an unknown probe, or no JSON, are answered in their place with exit 3', async () => {
    const lines = [
      ...c.lines.slice(0, 5),
      '{"probe":"Q","t":"2026-02-03T01:00:00Z","celsius":1}',
      '{',
    ]
    const { exit, out } = await ran(JSON.stringify(c.site), lines)
    expect(exit).toBe(3)
    const refused = out
      .trim()
      .split('\n')
      .map((l) => JSON.parse(l) as { line?: number; error?: { code: string; remedy: string } })
      .filter((l) => l.error !== undefined)
    expect(refused.map((r) => [r.line, r.error?.code])).toEqual([
      [6, 'unknown-probe'],
      [7, 'not-json'],
    ])
    expect(refused.every((r) => (r.error?.remedy.length ?? 0) > 5)).toBe(true)
  })

  test('a bad site file is refused with every complaint on stderr and exit 2', async () => {
    const bad = { ...(c.site as object), itemz: [], policy: { poisedChance: 2 } }
    const { exit, out, complaints } = await ran(JSON.stringify(bad), c.lines)
    expect(exit).toBe(2)
    expect(out).toBe('')
    expect(complaints).toMatch(/itemz/)
    expect(complaints).toMatch(/poisedChance/)
  })

  test('--every stands at whole multiples of the interval, and the end is always told', async () => {
    const until_ms = c.until_ms + 1_800_000
    const { verdicts } = await judged(c.site, c.lines, { every_ms: 600_000, until_ms })
    const grid = verdicts.filter((v) => Date.parse(v.t) % 600_000 === 0)
    expect(new Set(grid.map((v) => v.t)).size).toBeGreaterThanOrEqual(24)
    expect(Date.parse(verdicts.at(-1)?.t ?? '')).toBe(until_ms)
    expect(verdicts.at(-1)?.standing).toBe('Silent')
    const times = verdicts.map((v) => Date.parse(v.t))
    expect(times).toEqual([...times].sort((a, b) => a - b))
  })

  test.each([
    [['--site', 'a', '--reading', 'b'], '--reading'],
    [['--site', 'a'], '--readings'],
    [['--site', 'a', '--readings', 'b', '--every', 'often'], '--every'],
    [['--site', 'a', '--readings', 'b', '--until', 'noon'], '--until'],
  ])('bad usage %j is refused by name', (given, field) => {
    expect(() => argumentsOf(given)).toThrow(expect.objectContaining({ code: 'bad-usage', field }))
  })
})
