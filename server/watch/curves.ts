import type { ItemCurves } from '../../config/schema/api.js'
import { whereIce } from '../physics/branches.js'
import { endOfFreezing_C } from '../physics/curves.js'
import { jump } from '../physics/jump.js'
import { viewOf } from './judgement.js'
import { enthalpy_kJ_kg, type Matter, temperature_C } from './matter.js'
import { type Plan, valueAt } from './plan.js'
import type { GroupState } from './state.js'

/** Points per curve: a corner at the freezing point must look like one. */
const points = 120
/** How far beyond the present and the end of freezing the curves are drawn, K. */
const beyond_K = 4

/** Parts of the standard uncertainty of the margin of an item, largest first. */
export function budgetOf(
  state: GroupState,
  item: string | number,
  plan: Plan,
  now_ms: number,
): readonly { readonly key: string; readonly u_K: number }[] {
  const index = typeof item === 'number' ? item : plan.itemIndex(item)
  const v = viewOf(plan, state, index, now_ms)
  if (v === null || v.best === 'not assessable') return []
  const { estimate, matter } = v
  const k = v.item.slots.findIndex((s) => s.kind !== 'sibling')
  const probe = k < 0 ? null : plan.probes[v.item.slots[k]!.probe]!
  const accuracy_K = probe === null ? 0 : probe.given.accuracy_K / Math.sqrt(3)
  const bias_K = Math.min(estimate.budget.estimate_K, accuracy_K)
  const parts = [
    { key: 'budget.probe', u_K: bias_K },
    {
      key: 'budget.position',
      u_K: Math.sqrt(Math.max(0, estimate.budget.estimate_K ** 2 - bias_K ** 2)),
    },
    { key: 'budget.gradient', u_K: estimate.budget.location_K },
    { key: 'budget.model', u_K: estimate.budget.model_K },
    { key: 'budget.freezingPoint', u_K: Math.max(matter.uFreezing_K, estimate.budget.line_K) },
  ]
  return parts.filter((p) => p.u_K > 0).sort((a, b) => b.u_K - a.u_K)
}

const drawn = (m: Matter, onIce: boolean, from: number, to: number) => {
  const [h0, h1] = [enthalpy_kJ_kg(m, onIce, from), enthalpy_kJ_kg(m, onIce, to)]
  return Array.from({ length: points + 1 }, (_, i): readonly [number, number] => {
    const h = h0 + ((h1 - h0) * i) / points
    return [h - m.hFreezing, temperature_C(m, onIce, h)]
  })
}

/**
 * The two curves of an item, wall included, and the jump between them where it stands now.
 *
 * @returns null before the item was placed
 */
export function curvesOf(
  state: GroupState,
  item: string | number,
  plan: Plan,
  now_ms: number,
): ItemCurves | null {
  const index = typeof item === 'number' ? item : plan.itemIndex(item)
  const planned = plan.items[index]
  if (planned === undefined) return null
  const v = viewOf(plan, state, index, now_ms)
  if (v === null) return null
  const m = valueAt(planned.matter, now_ms)
  const liquid_C = v.estimate.liquid_C
  const known = v.best !== 'not assessable' && v.track.called === null && liquid_C !== null
  const jumps = known && liquid_C < m.freezing_C && liquid_C > -40
  const j = jumps ? jump(m.substance, m.wall_kJ_kgK, liquid_C) : null
  const stop_C = m.substance.stop === null ? null : endOfFreezing_C(m.substance)
  const coldest = Math.max(-39.9, Math.min(m.freezing_C - 12, v.estimate.T_C - beyond_K))
  const warmest = Math.max(m.freezing_C + 6, Math.min(30, v.estimate.T_C + beyond_K))
  const solid = whereIce(m.substance, m.wall_kJ_kgK, 0.9 * m.solidIce_kg_kg)
  return {
    freezingPoint_C: m.freezing_C,
    liquid: drawn(m, false, coldest, warmest),
    equilibrium: drawn(m, true, Math.min(coldest, solid.T_C - 1), warmest),
    jump:
      j === null ? null : { h_kJ_kg: j.h_kJ_kg - m.hFreezing, from_C: j.from_C, end_C: j.end_C },
    solid90: { h_kJ_kg: solid.h_kJ_kg - m.hFreezing, T_C: solid.T_C },
    stop_C,
    budget: budgetOf(state, index, plan, now_ms),
  }
}
