import { describe, expect, test } from 'vitest'
import { type Case, type Kind, type Placement, trace } from '../score/traces.js'
import { endOf, firstTurned, type Judged, judged } from './judged.js'

const run = (c: Case): Promise<Judged> =>
  judged(c.site, c.lines, { every_ms: 300_000, until_ms: c.until_ms })

const seconds = (c: Case, t: string): number => (Date.parse(t) - c.start_ms) / 1000

const anyTurned = (j: Judged): boolean => j.verdicts.some((v) => v.standing === 'Turned')

/** Six-shell bodies with wrong couplings, biased and lagging probes: not the watch's own model. */
describe('stories told by simulated rooms', () => {
  test.each<[string, number, Placement, boolean, number]>([
    ['in the item, with an air probe', 101, 'in-item', true, 60],
    ['in the item alone', 102, 'in-item', false, 60],
    ['in the item, every two minutes', 103, 'in-item', true, 120],
    ['in a witness', 104, 'in-witness', true, 60],
    ['on the wall, with an air probe', 105, 'on-item-wall', true, 60],
  ])('a turn seen %s is called in time and covers the moment', async (_, seed, place, air, s) => {
    const c = trace(seed, 'turn', place, air, { interval_s: s, hours: 14 })
    const turned_s = c.truth.turned_s ?? Number.NaN
    const j = await run(c)
    const call = firstTurned(j, 'X')
    expect(call).toBeDefined()
    const late_s = seconds(c, call?.t ?? '') - turned_s
    expect(late_s).toBeGreaterThanOrEqual(0)
    expect(late_s).toBeLessThanOrEqual(c.truth.tolerance_s)
    const end = endOf(j, 'X')
    expect(end.hasBeenFrozen).toBe(true)
    expect(seconds(c, end.turned.earliest ?? '')).toBeLessThanOrEqual(turned_s)
    expect(seconds(c, end.turned.latest ?? '')).toBeGreaterThanOrEqual(turned_s)
  })

  test.each<[string, Kind, number, Placement, boolean]>([
    ['a rewarming without ice', 'rewarm', 201, 'in-item', true],
    ['a rewarming without ice that no air probe sees', 'rewarm', 202, 'in-item', false],
    ['48: defrosts', 'defrost', 203, 'in-item', false],
    ['51: doors', 'quiet', 204, 'in-item', true],
    ['a probe pulled out', 'pulled', 205, 'in-item', false],
    ['24: a probe swapped', 'swapped', 206, 'in-item', true],
    ['17, 18: 85 and −127', 'codes', 207, 'in-item', false],
    ['15: °F sent as °C', 'fahrenheit', 208, 'in-item', false],
  ])('%s is not called a turn', async (_, kind, seed, place, air) => {
    const j = await run(trace(seed, kind, place, air, { interval_s: 60, hours: 14 }))
    expect(anyTurned(j)).toBe(false)
  })

  test('silence is called Silent, and nothing else, from three intervals on', async () => {
    const c = trace(301, 'silent', 'in-item', false, { interval_s: 60, hours: 14 })
    const [[from, to]] = c.truth.silent as [[number, number]]
    const j = await run(c)
    const during = j.verdicts.filter((v) => seconds(c, v.t) > from && seconds(c, v.t) < to)
    expect(during.length).toBeGreaterThan(5)
    expect(during.every((v) => v.standing === 'Silent' && v.evidence === 'not assessable')).toBe(
      true,
    )
    expect(during[0]?.cautions.length).toBeGreaterThan(0)
  })

  test.each<[string, Placement]>([
    ['in the air', 'in-air'],
    ['in a buffer', 'in-buffer'],
  ])('from a probe %s no rise is ever called, and why says so', async (_, place) => {
    const c = trace(401, 'turn', place, false, { interval_s: 60, hours: 14 })
    expect(c.truth.turned_s).not.toBeNull()
    const j = await run(c)
    expect(j.verdicts.some((v) => v.standing === 'Turned' && !v.turned.reckoned)).toBe(false)
    const below = j.verdicts.find((v) => v.standing === 'Below' || v.standing === 'Poised')
    expect(below?.why.join(' ')).toMatch(/no ice was seen/i)
  })

  test('stock placed frozen and meant to be so is Turned as intended, from air alone', async () => {
    const c = trace(501, 'frozen', 'in-air', false, { interval_s: 60, hours: 6 })
    const end = endOf(await run(c), 'X')
    expect(end).toMatchObject({ standing: 'Turned', phase: 'frozen', asIntended: true })
    expect(end.turned.reckoned).toBe(true)
  })

  test('47: frozen, then thawed: it has been frozen and stays Turned', async () => {
    const c = trace(601, 'turn-thaw', 'in-item', true, { interval_s: 60, hours: 30 })
    const end = endOf(await run(c), 'X')
    expect(end).toMatchObject({ standing: 'Turned', hasBeenFrozen: true })
  })
})
