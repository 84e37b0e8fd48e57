import { beforeAll, describe, expect, test } from 'vitest'
import { dataFile, endOf, firstTurned, type Judged, judged } from './judged.js'

/** LyoPronto run log of 4 June 2024 (MIT; data/lyo-mannitol-vial/README.md). Annotated by eye there. */
describe('5 % mannitol in vials, forced nucleation at 12:40 (measured)', () => {
  let run: Judged
  beforeAll(async () => {
    const site: unknown = JSON.parse(dataFile('lyo-mannitol-vial/site.json'))
    const lines = dataFile('lyo-mannitol-vial/readings.jsonl').trim().split('\n')
    run = await judged(site, lines, { every_ms: 60_000 })
  })

  test('it is called at the first readings after the nucleation and never before', () => {
    const call = firstTurned(run, 'vial-TP2')
    expect(call?.t).toMatch(/^2024-06-04T12:4[0-2]/)
    expect(call?.turned.earliest).toBe('2024-06-04T12:39:40Z')
    expect(call?.turned.latest).toBe('2024-06-04T12:40:40Z')
    expect(call?.turned.reckoned).toBe(false)
    expect(Math.abs((call?.turned.from_C ?? 0) + 6.3)).toBeLessThan(0.5)
  })

  test('the rise from 11:35 to 11:56, which ends 1.1 K below the line, is not called', () => {
    const during = run.verdicts.filter((v) => v.item === 'vial-TP2' && v.t < '2024-06-04T12:39')
    expect(during.length).toBeGreaterThan(100)
    expect(during.some((v) => v.hasBeenFrozen || v.standing === 'Turned')).toBe(false)
  })

  test('just before, the jump it would make is told within the measured peak', () => {
    const before = run.verdicts.findLast((v) => v.item === 'vial-TP2' && v.t < '2024-06-04T12:40')
    expect(Math.abs((before?.ifItFreezes?.end_C ?? 0) + 0.57)).toBeLessThan(0.05)
    expect(Math.abs((before?.ifItFreezes?.jump_K ?? 0) - 5.7)).toBeLessThan(0.5)
  })

  test('it stays frozen through annealing, and that it has been frozen stays true', () => {
    const later = run.verdicts.filter((v) => v.item === 'vial-TP2' && v.t > '2024-06-04T13:30')
    expect(later.every((v) => v.hasBeenFrozen && v.standing === 'Turned')).toBe(true)
    expect(later.some((v) => v.phase === 'liquid' || v.phase === 'supercooled')).toBe(false)
  })

  test('the empty slot that sends 999.9 is Silent and enters nothing', () => {
    const empty = endOf(run, 'vial-TP3')
    expect(empty.standing).toBe('Silent')
    expect(empty.evidenceProbes).not.toContain('TP3')
  })
})
