import { advance, ownSpeaks, thin, unknownsOf } from './advance.js'
import { hearAir, hearNeighbour } from './air.js'
import { turnedProbability } from './calling.js'
import { hearOwn, surroundingsOf } from './hear.js'
import { followed } from './phase.js'
import { type Group, type Plan, valueAt } from './plan.js'
import type { Core, Heard, ItemTrack } from './state.js'

/** Items that only the air moves are carried no oftener than this, ms of data time (watch.md §8). */
const lazy_ms = 60_000
/** Beyond this P(turned) a witness no longer shows how cold its siblings are. */
const witnessStillLiquid = 0.2

/** A neighbour that spoke within this keeps the word. */
const speakerKept_ms = 20 * 60_000

const replaced = <T>(all: readonly T[], k: number, value: T): readonly T[] =>
  all.map((x, i) => (i === k ? value : x))

/** Items in a storage unit that have stood still for a minute, carried on. */
const carryOthers = (plan: Plan, group: Group, core: Core, unit: number, t_ms: number): Core => {
  let items: ItemTrack[] | null = null
  for (let local = 0; local < core.items.length; local++) {
    const item = plan.items[group.items[local]!]!
    const track = core.items[local]!
    if (t_ms < item.placed_ms || t_ms >= item.removed_ms) continue
    if (track.t_ms >= 0 && t_ms - track.t_ms < lazy_ms) continue
    if (valueAt(item.places, t_ms) !== unit && track.unit !== unit) continue
    const moved = advance(plan, group, core, local, t_ms).track
    if (moved === track) continue
    items ??= [...core.items]
    items[local] = followed(
      plan,
      item,
      thin(moved, unknownsOf(item)),
      false,
      core.units[group.localUnit.get(moved.unit)!]!,
    )
  }
  return items === null ? core : { ...core, items }
}

/**
 * The core after one more reading in their order. Contradicted and disbelieved readings change
 * nothing, so that it does not matter which of two came first.
 */
export function heardInOrder(plan: Plan, group: Group, core: Core, entry: Heard): Core {
  const [t_ms, , probeIndex] = entry.place
  const raw_C = entry.values_C[0]
  if (!entry.believed || entry.values_C.length !== 1 || raw_C === null || raw_C === undefined)
    return core
  const probe = plan.probes[probeIndex]!
  const to = probe.assignments.findLast((a) => a.from_ms <= t_ms && t_ms < a.until_ms)
  if (to === undefined) return core
  const y_C = raw_C + valueAt(probe.calibration, t_ms).offset_K
  const touches = group.touching.get(probeIndex) ?? []
  const ofAir = probe.placement === 'in-air' || probe.placement === 'in-buffer'
  if (ofAir) {
    const unit = to.unit >= 0 ? to.unit : valueAt(plan.items[to.item]!.places, t_ms)
    const at = group.localUnit.get(unit)!
    const track = hearAir(core.units[at]!, probe, plan.probes, t_ms, y_C, raw_C)
    return carryOthers(plan, group, { ...core, units: replaced(core.units, at, track) }, unit, t_ms)
  }
  if (to.item < 0) return core
  let now = core
  for (const { local, slot } of touches) {
    const item = plan.items[group.items[local]!]!
    const isOwn = item.index === to.item
    if (!isOwn && item.witness !== to.item) continue
    if (!isOwn) {
      const witness = now.items[group.localItem.get(to.item)!]!
      if (turnedProbability(witness) > witnessStillLiquid) continue
    }
    const track = hearOwn(plan, group, now, local, slot, t_ms, y_C, raw_C)
    now = {
      ...now,
      items: replaced(
        now.items,
        local,
        followed(plan, item, track, true, now.units[group.localUnit.get(track.unit)!]!),
      ),
    }
  }
  return tellNeighbours(plan, group, now, to.item, t_ms)
}

/** Where no probe stands in the air, an item with a probe of its own speaks for those beside it. */
const tellNeighbours = (
  plan: Plan,
  group: Group,
  core: Core,
  index: number,
  t_ms: number,
): Core => {
  const local = group.localItem.get(index)!
  const track = core.items[local]!
  if (track.t_ms < 0 || track.bank.length === 0) return core
  const at = group.localUnit.get(track.unit)!
  const unit = core.units[at]!
  if (unit.source === 'air' || unit.source === 'buffer') return core
  // One speaker at a time: two that differ would make the air seem to jump to and fro.
  const other = unit.neighbour >= 0 && unit.neighbour !== index
  if (other && t_ms - unit.neighbour_ms < speakerKept_ms) return core
  const alone = !group.items.some(
    (i, k) => i !== index && core.items[k]!.unit === track.unit && plan.items[i]!.placed_ms <= t_ms,
  )
  if (alone || !ownSpeaks(plan, plan.items[index]!, track, t_ms, 3)) return core
  const { env_C, u_K } = surroundingsOf(plan, group, track, local)
  const told = hearNeighbour(unit, index, t_ms, env_C, u_K)
  return carryOthers(
    plan,
    group,
    { ...core, units: replaced(core.units, at, told) },
    track.unit,
    t_ms,
  )
}
