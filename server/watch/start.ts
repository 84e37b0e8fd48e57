import { own, perSlot } from './estimate.js'
import { at, type Gauss, independent } from './gauss.js'
import { enthalpy_kJ_kg, heatCapacity_kJ_kgK, temperature_C } from './matter.js'
import { type Plan, type PlannedItem, type Slot, valueAt } from './plan.js'
import { slotPrior } from './slots.js'
import type { Branch, ItemTrack } from './state.js'
import { spreadOfPosition_K } from './surroundings.js'

/** Chance that stock which is not meant to be frozen was placed as ice while colder than its line. */
const placedAsIce = { freezing: 0.002, other: 0.01 }
/** Stock meant to be frozen and placed as cold as that. */
const meantAsIce = 0.999

/** Prior of the three unknowns of one slot at a product temperature. */
const slotStart = (
  plan: Plan,
  slot: Slot,
  gradient: number,
  T_C: number,
  u_K: number,
): { mean: number[]; variance: number[] } => {
  const prior = slotPrior(plan, slot, gradient)
  return {
    mean: [prior.share, T_C, 0],
    variance: [prior.shareVar, u_K * u_K + 0.5, prior.biasVar_K2],
  }
}

/** Is this stock meant to be frozen, by its direction of harm or its label? */
export const meantFrozen = (item: PlannedItem, t_ms: number): boolean => {
  const product = valueAt(item.product, t_ms)
  const matter = valueAt(item.matter, t_ms)
  const label = product.label_C
  return (
    product.harm === 'thawing' ||
    product.harm === 'meant-part-frozen' ||
    (label !== undefined && label[1] < matter.freezing_C - 1)
  )
}

/**
 * The item's own start: temperature, and ice where it is meant.
 *
 * @param seen  a reading to start from; null for what the site file says
 */
export const bankOf = (
  plan: Plan,
  item: PlannedItem,
  start_ms: number,
  based: boolean,
  seen: { readonly T_C: number; readonly u_K: number; readonly ice: number | null } | null,
): Branch[] => {
  const matter = valueAt(item.matter, start_ms)
  const product = valueAt(item.product, start_ms)
  const unit = valueAt(plan.units[valueAt(item.places, start_ms)]!.given, start_ms)
  const label = product.label_C
  const given = seen?.T_C ?? item.item.initial_C
  const T_C = given ?? unit.setPoint_C ?? (label === undefined ? 5 : (label[0] + label[1]) / 2)
  const u_K = seen?.u_K ?? item.item.initial_u_K ?? (given === undefined ? 10 : 1)
  const branch = (kind: Branch['kind'], share: number): Branch => {
    const onIce = kind === 'ice'
    const T = onIce ? Math.min(T_C, matter.freezing_C - 0.05) : T_C
    const h = enthalpy_kJ_kg(matter, onIce, T)
    const c = heatCapacity_kJ_kgK(matter, onIce, h)
    const mean = [h, based ? 0 : (unit.setPoint_C ?? T_C), 0]
    const spread = based ? spreadOfPosition_K.air : 8
    // On the plateau a kelvin is most of the latent heat: the spread in h is cut there.
    const uh = Math.min(c * u_K, 60)
    const variance = [uh * uh, spread * spread, matter.couplingRelU ** 2]
    for (const slot of item.slots) {
      const prior = slotStart(plan, slot, matter.gradient, T, u_K)
      mean.push(...prior.mean)
      variance.push(...prior.variance)
    }
    return {
      kind,
      w: Math.log(share),
      g: independent(mean, variance),
      from_ms: start_ms,
      to_ms: start_ms,
      from_C: T,
      jump_K: 0,
      placedAsIce: onIce,
    }
  }
  const depth = (matter.freezing_C - T_C) / Math.hypot(u_K, matter.uFreezing_K, 0.05)
  if (depth < 0.5) return [branch('liquid', 1)]
  const known = seen?.ice ?? null
  const ice =
    known !== null
      ? known
      : meantFrozen(item, start_ms)
        ? depth > 2
          ? meantAsIce
          : 0.5
        : item.item.previouslyFrozen
          ? 0.2
          : product.harm === 'freezing'
            ? placedAsIce.freezing
            : placedAsIce.other
  return [branch('liquid', 1 - ice), branch('ice', ice)]
}

/** The start of a lot that was split off: what its parent was known to be, on its own probes. */
const inherited = (
  plan: Plan,
  item: PlannedItem,
  start_ms: number,
  parent: ItemTrack,
): Branch[] => {
  const matter = valueAt(item.matter, start_ms)
  return parent.bank.map((b) => {
    const n = b.g.length === 0 ? 0 : own + perSlot * parent.slots.length
    const onIce = b.kind === 'ice'
    const c = heatCapacity_kJ_kgK(matter, onIce, b.g[0]!)
    const T = temperature_C(matter, onIce, b.g[0]!)
    const u_K = Math.sqrt(b.g[at(n, 0, 0)]!) / c
    const mean = [b.g[0]!, b.g[1]!, b.g[2]!]
    const variance = [b.g[at(n, 0, 0)]!, b.g[at(n, 1, 1)]! + 0.3, b.g[at(n, 2, 2)]!]
    for (const slot of item.slots) {
      const prior = slotStart(plan, slot, matter.gradient, T, u_K)
      mean.push(...prior.mean)
      variance.push(...prior.variance)
    }
    const g: Gauss = independent(mean, variance)
    return { ...b, g }
  })
}

/**
 * The track of an item at the instant it begins: when it was placed, or split off another.
 *
 * @param based   an air reading serves its storage unit
 * @param parent  the track it was split from, carried to that instant; null for none
 */
export function started(
  plan: Plan,
  item: PlannedItem,
  track: ItemTrack,
  start_ms: number,
  air: { based: boolean; base_C: number; mark_Ks: number },
  parent: ItemTrack | null,
): ItemTrack {
  const matters = item.matter
  let matter = 0
  while (matter + 1 < matters.length && matters[matter + 1]!.from_ms <= start_ms) matter++
  const from = parent !== null && parent.t_ms >= 0 ? parent : null
  return {
    ...track,
    ...air,
    t_ms: start_ms,
    unit: valueAt(item.places, start_ms),
    matter,
    bank:
      from === null
        ? bankOf(plan, item, start_ms, air.based, null)
        : inherited(plan, item, start_ms, from),
    called: from?.called ?? null,
    exposure: from?.exposure ?? valueAt(matters, start_ms).noExposure,
    alive: from?.alive ?? 1,
    felt_C: from?.felt_C ?? item.item.initial_C ?? air.base_C,
  }
}
