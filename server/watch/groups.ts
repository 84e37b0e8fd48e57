import type { Group, PlannedItem, PlannedProbe, PlannedUnit } from './plan.js'

/** Items that a probe touches; those it only stands for as a witness come after its own. */
const touchedBy = (probe: number, items: readonly PlannedItem[]) => {
  const all = items.flatMap((item, local) => {
    const slot = item.slots.findIndex((s) => s.probe === probe)
    return slot < 0 ? [] : [{ local, slot, sibling: item.slots[slot]!.kind === 'sibling' }]
  })
  return [...all.filter((x) => !x.sibling), ...all.filter((x) => x.sibling)]
}

/**
 * The connected sets of storage units: linked by moves of items, by witnesses, by split lots, and by
 * probes that served in more than one of them.
 *
 * @returns in file order of their first storage unit
 */
export function groupsOf(
  items: readonly PlannedItem[],
  probes: readonly PlannedProbe[],
  units: readonly PlannedUnit[],
): Group[] {
  const root = units.map((u) => u.index)
  const find = (u: number): number => {
    let r = u
    while (root[r] !== r) r = root[r]!
    root[u] = r
    return r
  }
  const join = (a: number, b: number): void => {
    const [low, high] = [find(a), find(b)].sort((x, y) => x - y) as [number, number]
    root[high] = low
  }
  const home = (item: number): number => items[item]!.places[0]!.value
  for (const item of items) {
    for (const place of item.places) join(home(item.index), place.value)
    if (item.witness >= 0) join(home(item.index), home(item.witness))
    if (item.parent >= 0) join(home(item.index), home(item.parent))
  }
  for (const probe of probes) {
    const at = probe.assignments.map((a) => (a.item >= 0 ? home(a.item) : a.unit))
    for (const u of at) join(at[0]!, u)
  }
  const homeOfProbe = (p: PlannedProbe): number => {
    const first = p.assignments[0]
    return first === undefined ? -1 : find(first.item >= 0 ? home(first.item) : first.unit)
  }
  return [...new Set(units.map((u) => find(u.index)))].map((r, index) => {
    const own = units.filter((u) => find(u.index) === r)
    const inside = items.filter((i) => find(home(i.index)) === r)
    const heard = probes.filter((p) => homeOfProbe(p) === r)
    return {
      index,
      id: own.map((u) => u.id).sort()[0]!,
      units: own.map((u) => u.index),
      items: inside.map((i) => i.index),
      probes: heard.map((p) => p.index),
      touching: new Map(heard.map((p) => [p.index, touchedBy(p.index, inside)])),
      localUnit: new Map(own.map((u, local) => [u.index, local])),
      localItem: new Map(inside.map((i, local) => [i.index, local])),
    }
  })
}
