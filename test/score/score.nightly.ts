import { expect, test } from 'vitest'
import { runSuite } from './run.js'

/**
 * The watch against simulated truth that it does not share its model with. What is asked here is what
 * has been reached; the goals of the watch are higher and stand in its sheet.
 */
test('the figures of the watch over 240 simulated traces', async () => {
  const { table } = await runSuite(2, 1000)
  console.log(
    table
      .map((row) =>
        Object.entries(row)
          .map(([k, v]) => `${k} ${typeof v === 'number' && v % 1 !== 0 ? v.toFixed(3) : v}`)
          .join('  '),
      )
      .join('\n'),
  )
  const row = (name: string) => {
    const found = table.find((r) => r.row === name)
    if (found === undefined) throw new Error(`no row ${name}`)
    return found
  }
  for (const name of ['in item', 'in item+air']) {
    expect(row(name).recall).toBeGreaterThanOrEqual(0.9)
    expect(row(name).precision).toBeGreaterThanOrEqual(0.75)
    expect(row(name).coverage).toBeGreaterThanOrEqual(0.85)
    expect(row(name).above).toBe(0)
    expect(row(name).ece).toBeLessThanOrEqual(0.05)
  }
  expect(row('wall+air').recall).toBeGreaterThanOrEqual(0.6)
  expect(row('air or buffer').falsely).toBe(0)
}, 900_000)
