import type { Caution } from '../../config/schema/caution.js'
import { changes_ms, inForce, type OrHistory } from '../../config/schema/inForce.js'
import type { Container, Product } from '../../config/schema/product.js'
import type {
  Item,
  Placement,
  Policy,
  Probe,
  SiteFile,
  StorageUnit,
} from '../../config/schema/site.js'
import type { Priors } from '../physics/nucleation.js'
import type { SoluteTable } from '../physics/solution.js'
import { groupsOf } from './groups.js'
import { type Matter, matterOf } from './matter.js'

/** What the program ships as data and the watch needs. */
export type Library = {
  readonly solutes: SoluteTable
  readonly priors: Priors
  readonly cautions: readonly Caution[]
}

/** Values in force, oldest first; before the first `from_ms` the first counts. */
export type Dated<T> = readonly { readonly from_ms: number; readonly value: T }[]

/** How a probe bears on one item. A sibling's probe sits in the witness, not in the item. */
export type Slot = {
  readonly probe: number
  readonly kind: 'in-item' | 'wall' | 'witness' | 'sibling'
}

export type PlannedProbe = {
  readonly index: number
  readonly id: string
  readonly given: Probe
  readonly placement: Placement
  /** First-order lag, s. */
  readonly tau_s: number
  readonly interval_ms: number
  readonly calibration: Dated<{ readonly offset_K: number; readonly u_K: number }>
  readonly assignments: readonly {
    readonly from_ms: number
    readonly until_ms: number
    /** Index of the item, −1 for none. */
    readonly item: number
    /** Index of the storage unit, −1 for none. */
    readonly unit: number
  }[]
}

export type PlannedUnit = {
  readonly index: number
  readonly id: string
  readonly given: Dated<StorageUnit>
  readonly windows: readonly { readonly from_ms: number; readonly until_ms: number }[]
}

export type PlannedItem = {
  readonly index: number
  readonly id: string
  readonly item: Item
  readonly placed_ms: number
  /** Infinity while it is stored. */
  readonly removed_ms: number
  readonly places: Dated<number>
  readonly product: Dated<Product>
  readonly container: Dated<Container>
  readonly matter: Dated<Matter>
  readonly slots: readonly Slot[]
  /** Index of the item that carries its witness, −1 for none. */
  readonly witness: number
  readonly parent: number
  readonly parentUntil_ms: number
}

/**
 * Storage units that heat, items or probes have ever passed between, and all that is in them. The
 * watch steps a group at a time and knows nothing beyond it.
 */
export type Group = {
  readonly index: number
  /** The smallest id of its storage units: its partition is the one of this id. */
  readonly id: string
  readonly units: readonly number[]
  readonly items: readonly number[]
  readonly probes: readonly number[]
  /** For each probe the items it touches: place in `items`, and slot there; the item's own first. */
  readonly touching: ReadonlyMap<
    number,
    readonly { readonly local: number; readonly slot: number }[]
  >
  /** Place in `units` of a storage unit, and in `items` of an item. */
  readonly localUnit: ReadonlyMap<number, number>
  readonly localItem: ReadonlyMap<number, number>
}

export type Plan = {
  readonly site: SiteFile
  readonly library: Library
  readonly policy: Dated<Policy>
  readonly items: readonly PlannedItem[]
  readonly probes: readonly PlannedProbe[]
  readonly units: readonly PlannedUnit[]
  readonly groups: readonly Group[]
  readonly groupOfProbe: (probeId: string) => Group | null
  readonly groupOfItem: (itemId: string) => Group | null
  readonly probeIndex: (probeId: string) => number
  readonly itemIndex: (itemId: string) => number
}

/** The value in force at an instant. */
export const valueAt = <T>(dated: Dated<T>, t_ms: number): T => {
  let k = dated.length - 1
  while (k > 0 && dated[k]!.from_ms > t_ms) k--
  return dated[k]!.value
}

const datedOf = <T>(given: OrHistory<T>): Dated<T> => [
  { from_ms: Number.NEGATIVE_INFINITY, value: inForce(given, Number.NEGATIVE_INFINITY) },
  ...changes_ms(given).map((from_ms) => ({ from_ms, value: inForce(given, from_ms) })),
]

const byId = <T extends { readonly id: string }>(
  all: readonly OrHistory<T>[],
): ReadonlyMap<string, Dated<T>> =>
  new Map(all.map((given) => [datedOf(given)[0]!.value.id, datedOf(given)]))

const known = <T>(map: ReadonlyMap<string, T>, id: string): T => {
  const value = map.get(id)
  if (value === undefined) throw new Error(`${id} passed the site check but is not there`)
  return value
}

const until = (t: string | null): number => (t === null ? Number.POSITIVE_INFINITY : Date.parse(t))

const slotKind = (placement: Placement): Slot['kind'] | null =>
  placement === 'in-item'
    ? 'in-item'
    : placement === 'on-item-wall'
      ? 'wall'
      : placement === 'in-witness'
        ? 'witness'
        : null

/** Probes beyond these on one item are heard but not used: the joint estimate stays small. */
const mostSlots = 6

const plannedProbes = (
  site: SiteFile,
  items: ReadonlyMap<string, number>,
  units: ReadonlyMap<string, number>,
): PlannedProbe[] =>
  site.probes.map((given, index) => ({
    index,
    id: given.id,
    given,
    placement: given.placement,
    tau_s: given.T90_s / Math.LN10,
    interval_ms: given.interval_s * 1000,
    calibration:
      given.calibration === undefined
        ? [{ from_ms: Number.NEGATIVE_INFINITY, value: { offset_K: 0, u_K: given.accuracy_K / 2 } }]
        : datedOf(given.calibration),
    assignments: site.assignments
      .filter((a) => a.probe === given.id)
      .map((a) => ({
        from_ms: Date.parse(a.from),
        until_ms: until(a.until),
        item: 'item' in a.to ? known(items, a.to.item) : -1,
        unit: 'storageUnit' in a.to ? known(units, a.to.storageUnit) : -1,
      })),
  }))

/** Probes that ever touched the item, in file order. */
const slotsOf = (item: number, witness: number, probes: readonly PlannedProbe[]): Slot[] => {
  const touching = (target: number) =>
    probes.filter((p) => p.assignments.some((a) => a.item === target))
  const ofItem = touching(item).flatMap((p) => {
    const kind = slotKind(p.placement)
    return kind === null ? [] : [{ probe: p.index, kind }]
  })
  const ofWitness =
    witness < 0
      ? []
      : touching(witness).flatMap((p) =>
          slotKind(p.placement) === null || ofItem.some((s) => s.probe === p.index)
            ? []
            : [{ probe: p.index, kind: 'sibling' as const }],
        )
  return [...ofItem, ...ofWitness].slice(0, mostSlots)
}

/** Every instant at which product, container or learned coupling of an item changes. */
const matterOver = (
  item: Item,
  product: Dated<Product>,
  container: Dated<Container>,
  site: SiteFile,
  library: Library,
): Dated<Matter> => {
  const learned = site.learned.filter(
    (l) => l.item === item.id || (l.item === undefined && l.position === item.position),
  )
  const from = new Set([
    ...product.map((d) => d.from_ms),
    ...container.map((d) => d.from_ms),
    ...learned.map((l) => Date.parse(l.from)),
  ])
  return [...from]
    .sort((a, b) => a - b)
    .map((from_ms) => ({
      from_ms,
      value: matterOf(
        valueAt(product, from_ms),
        valueAt(container, from_ms),
        learned.findLast((l) => Date.parse(l.from) <= from_ms) ?? null,
        item.previouslyFrozen,
        library,
      ),
    }))
}

/**
 * Everything about a site that does not change with its readings, prepared once.
 *
 * @param site     as checked
 * @param library  the shipped tables
 * @throws Refusal where a product cannot be understood, e.g. an unknown solute
 */
export function planOf(site: SiteFile, library: Library): Plan {
  const products = byId<Product>(site.products)
  const containers = byId<Container>(site.containers)
  const unitRows = byId<StorageUnit>(site.storageUnits)
  const unitIndex = new Map([...unitRows.keys()].map((id, index) => [id, index]))
  const itemIndex = new Map(site.items.map((item, index) => [item.id as string, index]))
  const probes = plannedProbes(site, itemIndex, unitIndex)
  const probeIndex = new Map(probes.map((p) => [p.id, p.index]))
  const units = [...unitRows].map(([id, given], index) => ({
    index,
    id,
    given,
    windows: site.windows
      .filter((w) => w.storageUnit === id)
      .map((w) => ({ from_ms: Date.parse(w.from), until_ms: Date.parse(w.until) })),
  }))
  const items = site.items.map((item, index): PlannedItem => {
    const product = known(products, item.product)
    const container = known(containers, item.container)
    const witness = item.witness === undefined ? -1 : known(itemIndex, item.witness)
    return {
      index,
      id: item.id,
      item,
      placed_ms: Date.parse(item.placedAt),
      removed_ms: until(item.removedAt),
      places: [
        { from_ms: Number.NEGATIVE_INFINITY, value: known(unitIndex, item.storageUnit) },
        ...[...item.moves]
          .sort((a, b) => Date.parse(a.at) - Date.parse(b.at))
          .map((m) => ({ from_ms: Date.parse(m.at), value: known(unitIndex, m.storageUnit) })),
      ],
      product,
      container,
      matter: matterOver(item, product, container, site, library),
      slots: slotsOf(index, witness, probes),
      witness,
      parent: item.splitFrom === undefined ? -1 : known(itemIndex, item.splitFrom.item),
      parentUntil_ms: item.splitFrom === undefined ? 0 : Date.parse(item.splitFrom.at),
    }
  })
  const groups = groupsOf(items, probes, units)
  const groupOfUnit = new Map(groups.flatMap((g) => g.units.map((u) => [u, g] as const)))
  const groupOfItemIndex = (index: number) => groupOfUnit.get(items[index]!.places[0]!.value)!
  return {
    site,
    library,
    policy: datedOf(site.policy),
    items,
    probes,
    units,
    groups,
    groupOfProbe: (id) => {
      const first = probes[probeIndex.get(id) ?? -1]?.assignments[0]
      if (first === undefined) return null
      return first.item >= 0 ? groupOfItemIndex(first.item) : (groupOfUnit.get(first.unit) ?? null)
    },
    groupOfItem: (id) => {
      const index = itemIndex.get(id)
      return index === undefined ? null : groupOfItemIndex(index)
    },
    probeIndex: (id) => probeIndex.get(id) ?? -1,
    itemIndex: (id) => itemIndex.get(id) ?? -1,
  }
}
