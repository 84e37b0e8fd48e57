import type { Evidence } from '../../config/schema/verdict.js'
import type { Group, Plan, PlannedItem, Slot } from './plan.js'
import type { Core, ItemTrack } from './state.js'

/** A probe that bears on an item now, and what it last said. */
export type Witnessed = {
  readonly probe: number
  readonly evidence: Evidence
  readonly t_ms: number
  /** Corrected, °C. */
  readonly C: number
}

const bySlot: Record<Slot['kind'], Evidence> = {
  'in-item': 'measured in item',
  wall: 'measured on item wall',
  witness: 'measured on witness',
  sibling: 'measured on witness',
}

/** Best first (rulings.md 5); a neighbour only speaks where nothing stands in the air. */
const rank: readonly Evidence[] = [
  'measured in item',
  'measured on item wall',
  'measured on witness',
  'inferred from air',
  'inferred from buffer',
  'inferred from neighbour',
  'not assessable',
]

/**
 * What an item's verdict rests on at an instant: every probe that bears on it and has been believed
 * within the silent limit, best first (rulings.md 2 and 5).
 *
 * @param intervals  silence sets in after so many intervals of the probe
 */
export function evidenceOf(
  plan: Plan,
  group: Group,
  core: Core,
  item: PlannedItem,
  track: ItemTrack,
  now_ms: number,
  intervals: number,
): readonly Witnessed[] {
  if (now_ms < item.placed_ms || now_ms >= item.removed_ms) return []
  const isFresh = (probe: number, t_ms: number) =>
    t_ms >= 0 && t_ms > now_ms - intervals * plan.probes[probe]!.interval_ms
  const found: Witnessed[] = []
  item.slots.forEach((slot, k) => {
    const s = track.slots[k]!
    if (s.trusted_C !== null && isFresh(slot.probe, s.trusted_ms))
      found.push({
        probe: slot.probe,
        evidence: bySlot[slot.kind],
        t_ms: s.trusted_ms,
        C: s.trusted_C,
      })
  })
  const at = group.localUnit.get(placeAt(item, now_ms))
  const unit = at === undefined ? undefined : core.units[at]
  for (const p of unit?.probes ?? []) {
    // A control probe belongs to the machine that is being watched: it is no independent witness.
    const isControl = plan.probes[p.probe]!.given.role === 'control'
    if (isControl || p.stuck || !isFresh(p.probe, p.trusted_ms)) continue
    const evidence: Evidence =
      plan.probes[p.probe]!.placement === 'in-air' ? 'inferred from air' : 'inferred from buffer'
    found.push({ probe: p.probe, evidence, t_ms: p.trusted_ms, C: p.trusted_C })
  }
  if (
    found.length === 0 &&
    unit !== undefined &&
    unit.neighbour >= 0 &&
    unit.neighbour !== item.index
  ) {
    const other = plan.items[unit.neighbour]!
    const its = core.items[group.localItem.get(unit.neighbour)!]!
    other.slots.forEach((slot, k) => {
      const s = its.slots[k]!
      if (slot.kind !== 'sibling' && s.trusted_C !== null && isFresh(slot.probe, s.trusted_ms))
        found.push({
          probe: slot.probe,
          evidence: 'inferred from neighbour',
          t_ms: s.trusted_ms,
          C: s.trusted_C,
        })
    })
  }
  return found.sort(
    (a, b) => rank.indexOf(a.evidence) - rank.indexOf(b.evidence) || a.probe - b.probe,
  )
}

/** Storage unit of an item at an instant. */
export const placeAt = (item: PlannedItem, t_ms: number): number => {
  let unit = item.places[0]!.value
  for (const p of item.places) if (p.from_ms <= t_ms) unit = p.value
  return unit
}
