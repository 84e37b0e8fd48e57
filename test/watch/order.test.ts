import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { readLibrary } from '../../config/library/read.js'
import { type Reading, type ReadingLine, readingOf } from '../../config/schema/reading.js'
import { readSite } from '../../config/schema/readSite.js'
import { judgementOf } from '../../server/watch/judgement.js'
import { planOf } from '../../server/watch/plan.js'
import { freshState, type GroupState } from '../../server/watch/state.js'
import { replayed, step } from '../../server/watch/step.js'
import { trace } from '../score/traces.js'
import { judged } from './judged.js'

const c = trace(701, 'turn', 'in-item', true, { interval_s: 300, hours: 10 })
const plan = planOf(readSite(c.site), readLibrary())
const group = plan.groups[0]!
const readings = c.lines.map((l): Reading => readingOf(JSON.parse(l) as ReadingLine))

const endOf = (state: GroupState) => judgementOf(state, 0, plan, c.until_ms)

/** Readings in an order of arrival, each at a clock that only goes forward; replayed where needed. */
const arrived = (order: readonly Reading[]): GroupState => {
  let state = freshState(plan, group)
  for (const r of order) {
    state = step(state, { kind: 'readings', readings: [r], now_ms: r.receivedAt_ms }, plan).state
    if (state.needsReplayFrom_ms !== null) state = replayed(state, order, plan).state
  }
  return step(state, { kind: 'clock', now_ms: c.until_ms }, plan).state
}

describe('order, lateness and repeats', () => {
  test('11, law: any order of the same lines ends in the same verdict', async () => {
    const last = async (lines: readonly string[]) =>
      JSON.stringify((await judged(c.site, lines, { until_ms: c.until_ms })).verdicts.at(-1))
    const sorted = await last(c.lines)
    await fc.assert(
      fc.asyncProperty(
        fc.shuffledSubarray([...c.lines], { minLength: c.lines.length }),
        async (lines) => {
          expect(await last(lines)).toBe(sorted)
        },
      ),
      { numRuns: 6 },
    )
  })

  test('9: the same line again changes nothing', async () => {
    const once = await judged(c.site, c.lines)
    const twice = await judged(
      c.site,
      c.lines.flatMap((l) => [l, l]),
    )
    expect(twice).toEqual(once)
  })

  test('10: a contradicted key enters nothing, whichever value came first', async () => {
    const at = 100
    const line = c.lines[at]!
    const other = JSON.stringify({ ...(JSON.parse(line) as ReadingLine), celsius: 3.3 })
    const without = c.lines.filter((_, i) => i !== at)
    const end = async (lines: readonly string[]) =>
      (await judged(c.site, lines, { until_ms: c.until_ms })).verdicts.at(-1)
    const left = await end(without)
    expect(await end([...c.lines.slice(0, at), other, ...c.lines.slice(at)])).toEqual(left)
    expect(await end([...c.lines, other])).toEqual(left)
    expect(left).not.toEqual(await end(c.lines.slice(0, at)))
  })

  test('7: a backfill of hours, older than what is remembered, ends as if it had come in time', () => {
    const late = readings.map((r, i) =>
      i > 20 && i < 60 ? { ...r, receivedAt_ms: c.start_ms + 9.5 * 3_600_000 + i } : r,
    )
    const order = [...late].sort((a, b) => a.receivedAt_ms - b.receivedAt_ms)
    expect(endOf(arrived(order))).toEqual(endOf(arrived(readings)))
  })

  test('13: saved as JSON and read back in the middle, it ends the same', () => {
    let state = freshState(plan, group)
    readings.forEach((r, i) => {
      state = step(state, { kind: 'readings', readings: [r], now_ms: r.receivedAt_ms }, plan).state
      if (i % 37 === 0) state = JSON.parse(JSON.stringify(state)) as GroupState
    })
    state = step(state, { kind: 'clock', now_ms: c.until_ms }, plan).state
    expect(endOf(state)).toEqual(endOf(arrived(readings)))
  })

  test('the clock never runs back', () => {
    let state = freshState(plan, group)
    state = step(state, { kind: 'clock', now_ms: c.until_ms }, plan).state
    state = step(state, { kind: 'clock', now_ms: c.start_ms }, plan).state
    expect(state.clock_ms).toBe(c.until_ms)
  })
})
