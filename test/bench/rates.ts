import { readLibrary } from '../../config/library/read.js'
import type { Reading } from '../../config/schema/reading.js'
import type { ProbeId } from '../../config/schema/site.js'
import { hLiquid } from '../../server/physics/curves.js'
import { fastHazard_h, fastOnIce_C, hazardTableOf, tableOf } from '../../server/physics/fast.js'
import { drivingForce_J_kg } from '../../server/physics/fusion.js'
import { jump } from '../../server/physics/jump.js'
import { kineticsOf, noExposure } from '../../server/physics/nucleation.js'
import { substanceOf } from '../../server/physics/substance.js'
import { planOf } from '../../server/watch/plan.js'
import { freshState } from '../../server/watch/state.js'
import { step } from '../../server/watch/step.js'
import { siteOfSize, temperature_C } from './site.js'

const library = readLibrary()
const seconds = (work: () => void): number => {
  const from = performance.now()
  work()
  return (performance.now() - from) / 1000
}

/** A sum that is printed nowhere but keeps the work from being dropped. */
export const sink = { value: 0 }

/**
 * Physics evaluations per second on one core: margin, driving force, recalescence, hazard. By the
 * tables of the hot path, and by the exact equations for comparison.
 */
export const physicsRates = (): { fast: number; exact: number } => {
  const s = substanceOf(
    {
      freezing: {
        kind: 'osmolality',
        osmolality_osmol_kg: 0.287,
        water_kg_kg: 0.99,
        bound_kg_kg: 0,
      },
    },
    library.solutes,
  )
  const wall_kJ_kgK = 0.9
  const table = tableOf(s, wall_kJ_kgK)
  const kinetics = kineticsOf(library.priors, 'clean-solution', 1e-5, false)
  const hazard = hazardTableOf(kinetics, noExposure(kinetics), 0)
  const π0 = s.osmolality_osmol_kg
  const fast = (n: number) => {
    for (let k = 0; k < n; k++) {
      const t = -0.6 - (k % 997) / 100
      const margin_K = t - s.freezingPoint_C
      const end_C = fastOnIce_C(table, hLiquid(s, t) + wall_kJ_kgK * t)
      sink.value += margin_K + drivingForce_J_kg(t, π0) + end_C + fastHazard_h(hazard, 0, -margin_K)
    }
  }
  const exact = (n: number) => {
    for (let k = 0; k < n; k++) {
      const t = -0.6 - (k % 997) / 100
      sink.value += drivingForce_J_kg(t, π0) + jump(s, wall_kJ_kgK, t).end_C
    }
  }
  fast(200_000)
  exact(20_000)
  const n = 1_000_000
  const m = 50_000
  return { fast: n / seconds(() => fast(n)), exact: m / seconds(() => exact(m)) }
}

/** Item updates per second on one core: a reading of a probe in its item, judged. */
export const watchRate = (items: number, minutes: number): number => {
  const start_ms = Date.UTC(2026, 0, 5)
  const plan = planOf(siteOfSize(items, new Date(start_ms).toISOString()), library)
  const states = new Map(plan.groups.map((g) => [g.id, freshState(plan, g)]))
  const readings = Array.from({ length: minutes }, (_, k) =>
    Array.from({ length: items }, (_, i): Reading => {
      const t_ms = start_ms + (k + 1) * 60_000 + (i % 60) * 1000
      return {
        probe: `P${i}` as ProbeId, // the id that siteOfSize gave it
        t_ms,
        receivedAt_ms: t_ms,
        celsius: temperature_C(i, k),
        seq: k,
        quality: 'good',
        timeSource: 'device',
      }
    }),
  )
    .flat()
    .sort((a, b) => a.t_ms - b.t_ms)
  const run = () => {
    for (const reading of readings) {
      const group = plan.groupOfProbe(reading.probe)
      const state = group === null ? undefined : states.get(group.id)
      if (group === null || state === undefined) continue
      const input = { kind: 'readings' as const, readings: [reading], now_ms: reading.t_ms }
      states.set(group.id, step(state, input, plan).state)
    }
  }
  return readings.length / seconds(run)
}
