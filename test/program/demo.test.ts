import { expect, onTestFinished, test } from 'vitest'
import { readLibrary } from '../../config/library/read.js'
import { readingOf } from '../../config/schema/reading.js'
import type { Judgement } from '../../config/schema/verdict.js'
import { planOf } from '../../server/watch/plan.js'
import { freshState } from '../../server/watch/state.js'
import { step } from '../../server/watch/step.js'
import { lineOf } from '../../sim/messages.js'
import { advance, freshState as freshSite } from '../../sim/model.js'
import { scenarioOf, siteOf } from '../../sim/scenarios.js'
import { worldOf } from '../../sim/world.js'
import { launchBrowser } from '../browser/chromium.js'
import { listen, start, temporaryFolder } from './hoarline.js'

/** Every change of verdict in the first hours of the demo, as the watch calls them. */
const changesIn = (hours: number): Judgement[] => {
  const library = readLibrary()
  const scenario = scenarioOf('demo')
  const site = siteOf(scenario)
  const world = worldOf(scenario, site, library.solutes, scenario.seed)
  const { sent } = advance(world, freshSite(world, scenario.seed), hours * 3600, scenario.seed)
  const plan = planOf(site, library)
  const begin = { kind: 'clock' as const, now_ms: world.start_ms }
  const states = new Map(
    plan.groups.map((g) => [g.id, step(freshState(plan, g), begin, plan).state]),
  )
  const changes: Judgement[] = []
  for (const s of [...sent].sort((a, b) => a.t_s - b.t_s)) {
    const reading = readingOf(lineOf(world, s))
    const group = plan.groupOfProbe(reading.probe)
    const state = group === null ? undefined : states.get(group.id)
    if (group === null || state === undefined) continue
    const input = { kind: 'readings' as const, readings: [reading], now_ms: reading.receivedAt_ms }
    const { state: after, events } = step(state, input, plan)
    states.set(group.id, after)
    for (const event of events) if (event.kind === 'changed') changes.push(event.judgement)
  }
  const now_ms = world.start_ms + hours * 3_600_000
  for (const state of states.values())
    for (const event of step(state, { kind: 'clock', now_ms }, plan).events)
      if (event.kind === 'changed') changes.push(event.judgement)
  return changes
}

test('in two minutes of the demo something is Near, Below and Poised, one item turns, and a decoy only rewarms', () => {
  const changes = changesIn(2.25)
  const of = (item: string) => changes.filter((j) => j.item === item)
  const standings = new Set(changes.map((j) => j.standing))
  for (const standing of ['Above', 'Near', 'Below', 'Poised', 'Turned', 'Silent'])
    expect(standings).toContain(standing)

  const turned = new Set(
    changes.filter((j) => j.standing === 'Turned' && !j.asIntended).map((j) => j.item),
  )
  expect([...turned]).toEqual(['2-W'])
  const turn = of('2-W').find((j) => j.standing === 'Turned')
  expect(turn).toMatchObject({ evidence: 'measured on witness', hasBeenFrozen: true })
  expect(turn?.turned.from_C).toBeLessThan(-3)

  for (const decoy of ['R-3', 'R-4']) {
    const story = of(decoy).map((j) => j.standing)
    expect(story.some((s) => s === 'Below' || s === 'Poised')).toBe(true)
    expect(story.at(-1)).toBe('Above')
    expect(of(decoy).every((j) => !j.hasBeenFrozen)).toBe(true)
  }
  for (const frozen of ['F-1', 'F-2', 'F-3', 'F-4', 'F-5'])
    expect(of(frozen).at(-1)).toMatchObject({ standing: 'Turned', asIntended: true })
})

test('the demo runs by itself: real messages through the broker, its own clock, and the frame says so', async () => {
  const folder = temporaryFolder()
  const args = ['--data', folder, '--mqtt-port', '0']
  const running = await start(args)
  const live = await listen(running)
  const turned = live.untilItem('2-W', (i) => i.verdict.standing === 'Turned')
  const before = (await running.snapshot()).site
  expect(before).toMatchObject({
    practice: true,
    speed: 60,
    tryProbe: { item: 'TRY', topic: expect.any(String) },
  })
  const put = await fetch(`${running.http}/api/v1/practice/speed`, {
    method: 'PUT',
    headers: { 'Content-Type': 'application/json' },
    body: '{"speed":600}',
  })
  expect(put.status).toBe(200)
  await turned

  const browser = await launchBrowser()
  onTestFinished(() => browser.close())
  const page = await browser.newPage({ viewport: { width: 1440, height: 900 } })
  await page.goto(running.http)
  await page.getByText('Simulated site').first().waitFor()
  expect(await page.title()).toMatch(/^PRACTICE/)
  await page
    .getByText(/The rise is not recovery/)
    .first()
    .waitFor()

  const { intake, site, items } = await running.snapshot()
  expect(intake).toMatchObject({ duplicates: 0, conflicts: 0, refused: 0, notEvaluated: [] })
  await running.kill()
  const again = await start(args)
  const after = await again.snapshot()
  expect(after.site.now_ms).toBeGreaterThanOrEqual(site.now_ms)
  const was = items.find((i) => i.id === '2-W')
  const is = after.items.find((i) => i.id === '2-W')
  expect(is?.verdict).toMatchObject({ standing: 'Turned', hasBeenFrozen: true })
  expect(is?.announcedTurned_ms).toBe(was?.announcedTurned_ms)
  expect(await again.stop()).toBe(0)
})
