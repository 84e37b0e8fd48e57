import { describe, expect, test } from 'vitest'
import { readLibrary } from '../../config/library/read.js'
import { jump } from '../../server/physics/jump.js'
import { lineOf, messageOf } from '../../sim/messages.js'
import {
  advance,
  freshState,
  meanIce_kg_kg,
  meanTemperature_C,
  type SimState,
} from '../../sim/model.js'
import { scenarioOf, scenarios, siteOf } from '../../sim/scenarios.js'
import { shifted } from '../../sim/shift.js'
import { worldOf } from '../../sim/world.js'

const { solutes } = readLibrary()
const worldFor = (id: string, seed: number) => {
  const scenario = scenarioOf(id)
  return worldOf(scenario, siteOf(scenario), solutes, seed)
}
const at = (world: ReturnType<typeof worldFor>, id: string): number =>
  world.items.findIndex((i) => i.id === id)

/** Temperatures and turns of an item every minute of the first hours. */
const traceOf = (scenario: string, item: string, hours: number) => {
  const world = worldFor(scenario, 42)
  const state = freshState(world, 42)
  const i = at(world, item)
  const points: { t_min: number; T_C: number; turned: boolean; ice: number }[] = []
  for (let t_min = 1; t_min <= hours * 60; t_min++) {
    advance(world, state, t_min * 60, 42)
    const [own, now] = [world.items[i]!, state.items[i]!]
    points.push({
      t_min,
      T_C: meanTemperature_C(own, now),
      turned: now.turned_s >= 0,
      ice: meanIce_kg_kg(own, now),
    })
  }
  return { freezing_C: world.items[i]!.branches.substance.freezingPoint_C, points }
}

describe('the simulated site', () => {
  test('the same seed gives the same bytes, another seed others', () => {
    const run = (seed: number) => {
      const world = worldFor('demo', seed)
      const { sent } = advance(world, freshState(world, seed), 3600, seed)
      return JSON.stringify(sent.map((s) => lineOf(world, s)))
    }
    expect(run(5)).toBe(run(5))
    expect(run(5)).not.toBe(run(6))
  })

  test('saved as JSON and taken up again, it goes on to the same bit', () => {
    const world = worldFor('by-chance', 3)
    const whole = freshState(world, 3)
    const first = advance(world, whole, 5400, 3)
    const second = advance(world, whole, 10_800, 3)

    const half = freshState(world, 3)
    advance(world, half, 5400, 3)
    const again = JSON.parse(JSON.stringify(half)) as SimState
    const resumed = advance(world, again, 10_800, 3)
    expect(resumed).toEqual(second)
    expect(again).toEqual(whole)
    expect(first.sent.length).toBeGreaterThan(1000)
  })

  test('a turn leaves the heat where it is: the item rises to where the two curves meet', () => {
    const world = worldFor('witness-turns', 1)
    const state = freshState(world, 1)
    const i = at(world, '2-W')
    const item = world.items[i]!
    const { turns } = advance(world, state, 8395, 1)
    expect(turns).toEqual([]) // the act falls at 8400 s
    const before = [...state.items[i]!.h]
    const from_C = meanTemperature_C(item, state.items[i]!)
    state.items[i]!.turned_s = state.t_s
    expect(state.items[i]!.h).toEqual(before)
    const reached_C = meanTemperature_C(item, state.items[i]!)
    const { end_C } = jump(item.branches.substance, 0, from_C)
    expect(Math.abs(reached_C - end_C)).toBeLessThan(0.02)
  })

  test('an item that gives no heat to the air keeps its own for a day, whatever turns and melts in it', () => {
    const demo = worldFor('demo', 8)
    const world = { ...demo, items: demo.items.map((item) => ({ ...item, UA_W_K: 0 })) }
    const state = freshState(world, 8)
    // Shells far from each other: some turned, some deep below their lines, a wall that is warm.
    state.items.forEach((now, i) => {
      now.h = now.h.map((h, k) => h - 4 * k - (i % 5) * 6)
      now.wall_C += 12
      if (i % 2 === 0) now.turned_s = 0
    })
    const heat_kJ = () =>
      world.items.map((item, i) => {
        const { h, wall_C } = state.items[i]!
        return item.shell_kg * h.reduce((a, b) => a + b, 0) + item.wall_kJ_K * wall_C
      })
    const before = heat_kJ()
    advance(world, state, 86_400, 8)
    heat_kJ().forEach((after, i) => {
      const item = world.items[i]!
      const scale_kJ = 4 * item.shell_kg * 10 // what 2–3 K of its product hold
      expect(Math.abs(after - before[i]!) / scale_kJ, item.id).toBeLessThan(1e-6)
      expect(
        Math.abs(meanTemperature_C(item, state.items[i]!) - state.items[i]!.wall_C),
        item.id,
      ).toBeLessThan(0.1) // they began 12 K and more apart
    })
  })

  test('an item left in still air of its own temperature stays as it is', () => {
    const world = worldFor('demo', 8)
    const calm = {
      ...world,
      scenario: { ...world.scenario, acts: [] },
      units: world.units.map((u) => ({ ...u, ambient_C: u.setPoint_C, pull_K: 0 })),
    }
    const state = freshState(calm, 8)
    const i = at(calm, '1-B1')
    advance(calm, state, 7200, 8)
    expect(Math.abs(meanTemperature_C(calm.items[i]!, state.items[i]!) - 5)).toBeLessThan(0.4) // its place differs by at most 0.3 K
  })

  test('every scenario there is can be played on its site', () => {
    for (const { id } of scenarios()) {
      const world = worldFor(id, 1)
      expect(advance(world, freshState(world, 1), 600, 1).sent.length).toBeGreaterThan(50)
    }
  })

  test('a scenario that names what its site lacks is refused', () => {
    const scenario = scenarioOf('demo')
    const wrong = {
      ...scenario,
      acts: [
        { act: 'door' as const, at_s: 0, jitter_s: 0, minutes: 1, storageUnit: 'CR-9' as never },
      ],
    }
    expect(() => worldOf(wrong, siteOf(scenario), solutes, 1)).toThrow(
      /acts\[0\]\.storageUnit is CR-9/,
    )
    expect(() => scenarioOf('dmeo')).toThrow(/did you mean "demo"/)
  })
})

describe('the first two hours of the demo', () => {
  test('a witness turns after an hour or so, from well below its own freezing point', () => {
    const { freezing_C, points } = traceOf('demo', '2-W', 2)
    const turned = points.find((p) => p.turned)
    expect(turned?.t_min).toBeGreaterThan(55)
    expect(turned?.t_min).toBeLessThan(80)
    const before = points[(turned?.t_min ?? 1) - 2]
    expect(before?.T_C).toBeLessThan(freezing_C - 3)
    expect(turned?.T_C).toBeGreaterThan(freezing_C - 0.5)
  })

  test('a decoy goes below its line and comes back up through it, and never holds ice', () => {
    const { freezing_C, points } = traceOf('demo', 'R-4', 3)
    const lowest = points.reduce((a, b) => (b.T_C < a.T_C ? b : a))
    expect(lowest.T_C).toBeLessThan(freezing_C - 1)
    expect(points.at(-1)?.T_C).toBeGreaterThan(freezing_C + 1)
    expect(points.every((p) => !p.turned && p.ice === 0)).toBe(true)
  })

  test('its stock in the freezer stays frozen', () => {
    const { points } = traceOf('demo', 'F-3', 4)
    expect(points.every((p) => p.turned && p.ice > 0.5)).toBe(true)
  })
})

test('a message is SenML with an absolute time, on the topic of its probe', () => {
  const world = worldFor('demo', 1)
  const sent = advance(world, freshState(world, 1), 120, 1).sent[0]!
  const message = messageOf(world, sent)
  const [record] = JSON.parse(message?.payload ?? '[]') as Record<string, unknown>[]
  expect(record).toEqual({
    n: expect.stringMatching(/^urn:dev:ow:/),
    u: 'Cel',
    t: (world.start_ms + sent.t_s * 1000) / 1000,
    v: sent.celsius,
  })
  expect(message?.topic).toMatch(/^skerrow\//)
})

test('a site moved in time keeps every distance between its instants', () => {
  const site = siteOf(scenarioOf('demo'))
  const moved = shifted(site, 86_400_000)
  expect(Date.parse(moved.items[0]!.placedAt) - Date.parse(site.items[0]!.placedAt)).toBe(
    86_400_000,
  )
  expect(Date.parse(moved.assignments[0]!.from) - Date.parse(site.assignments[0]!.from)).toBe(
    86_400_000,
  )
})
