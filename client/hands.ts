import type { ItemView, Snapshot } from '../config/schema/api.js'
import type { Interval } from '../config/schema/verdict.js'
import { isAsIntended, isFalling, isUrgentNear, shownStanding } from './shown.js'

/** Why an item needs a hand, most pressing first (rulings.md 14). */
export type Need = 'turned' | 'poised' | 'below' | 'reaching' | 'silent'

/** How long there is. */
export type Lead =
  | { readonly kind: 'now' }
  /** It is supercooled already; until when the site's limit is reached is not reckoned. */
  | { readonly kind: 'below' }
  | { readonly kind: 'atLine' }
  | { readonly kind: 'within'; readonly h: Interval }
  | { readonly kind: 'unknown' }

export type NeedyItem = { readonly item: ItemView; readonly need: Need; readonly lead: Lead }

/** What one visit deals with: cold that reaches items, ice where there should be, or silence. */
export type Cause = 'cold' | 'warming' | 'silent'

/** One cause in one storage unit, with its items, the most pressing first. */
export type Entry = {
  readonly key: string
  readonly storageUnit: string
  readonly cause: Cause
  readonly need: Need
  readonly lead: Lead
  readonly items: readonly NeedyItem[]
  /** Keys of caution rows, the most urgent of the most pressing item first. */
  readonly cautions: readonly string[]
}

type Policy = Snapshot['site']['policy']

const rank: Readonly<Record<Need, number>> = {
  turned: 0,
  poised: 1,
  below: 2,
  reaching: 3,
  silent: 4,
}

const never = Number.POSITIVE_INFINITY

const needOf = (item: ItemView, policy: Policy): Need | null => {
  if (item.verdict.heldBy !== null || isAsIntended(item)) return null
  switch (shownStanding(item)) {
    case 'Turned':
      return 'turned'
    case 'Poised':
      return 'poised'
    case 'Below':
      return 'below'
    case 'Near':
      return isUrgentNear(item, policy) || isFalling(item, policy) ? 'reaching' : null
    case 'Above':
      return isFalling(item, policy) ? 'reaching' : null
    case 'Silent':
      return item.harm === 'freezing' || item.harm === 'both' ? 'silent' : null
  }
}

const leadOf = (item: ItemView, need: Need): Lead => {
  if (need === 'turned' || need === 'poised') return { kind: 'now' }
  if (need === 'silent') return { kind: 'unknown' }
  if (need === 'below')
    return item.poisedIn_h == null ? { kind: 'below' } : { kind: 'within', h: item.poisedIn_h }
  if (shownStanding(item) === 'Near' && (item.verdict.belowProbability ?? 0) >= 0.5)
    return { kind: 'atLine' }
  const crossing = item.verdict.crossing.below_h
  return crossing === null ? { kind: 'atLine' } : { kind: 'within', h: crossing }
}

/** The number that orders items of one need: smaller is sooner. */
const orderWithin = ({ item, need, lead }: NeedyItem): number => {
  if (need === 'poised') {
    const chance = item.verdict.chance
    return -(chance?.any_1h?.[2] ?? chance?.high ?? 0)
  }
  if (need === 'below') return lead.kind === 'within' ? lead.h[0] : never
  if (need === 'reaching') return lead.kind === 'within' ? lead.h[0] : -1
  return 0
}

const byPressing = (a: NeedyItem, b: NeedyItem): number =>
  rank[a.need] - rank[b.need] ||
  // Both may be `never`, and never − never is not a number.
  (orderWithin(a) === orderWithin(b) ? 0 : orderWithin(a) - orderWithin(b)) ||
  b.item.count - a.item.count ||
  (a.item.id < b.item.id ? -1 : 1)

const causeOf = ({ item, need }: NeedyItem): Cause => {
  if (need === 'silent') return 'silent'
  const meantFrozen = item.harm === 'thawing' || item.harm === 'meant-part-frozen'
  return meantFrozen && need === 'turned' ? 'warming' : 'cold'
}

/**
 * What needs a hand, in the order of rulings.md 14: turned and not yet held; poised by the chance
 * within an hour; below by the time to poised; falling by the low end of its crossing; silent where
 * freezing harms; then by count. Held items, and stock that is as intended, never appear.
 *
 * One entry per cause and storage unit: whoever goes there meets all its items at once.
 */
export const handsNeeded = (items: readonly ItemView[], policy: Policy): readonly Entry[] => {
  const entries = new Map<string, NeedyItem[]>()
  const needy = items
    .map((item): NeedyItem | null => {
      const need = needOf(item, policy)
      return need === null ? null : { item, need, lead: leadOf(item, need) }
    })
    .filter((n) => n !== null)
    .sort(byPressing)
  for (const one of needy) {
    const key = `${one.item.storageUnit} ${causeOf(one)}`
    const entry = entries.get(key)
    if (entry === undefined) entries.set(key, [one])
    else entry.push(one)
  }
  // A Map keeps the order of first insertion, and each entry's first item came in order.
  return [...entries].flatMap(([key, members]) => {
    const first = members[0]
    if (first === undefined) return []
    return [
      {
        key,
        storageUnit: first.item.storageUnit,
        cause: causeOf(first),
        need: first.need,
        lead: first.lead,
        items: members,
        cautions: [...new Set(members.flatMap((m) => m.item.verdict.cautions))],
      },
    ]
  })
}

/** Items whose line lies within the uncertainty, and which nobody needs to go to. */
export const withinUncertainty = (items: readonly ItemView[], policy: Policy): number =>
  items.filter((i) => shownStanding(i) === 'Near' && !isAsIntended(i) && !isUrgentNear(i, policy))
    .length

/** Items of which nothing can be said. */
export const notAssessable = (items: readonly ItemView[]): number =>
  items.filter((i) => shownStanding(i) === 'Silent' || i.verdict.evidence === 'not assessable')
    .length

/** The table twin's order: as Hands, then by margin, as intended and unknown last. */
export const tableOrder = (
  items: readonly ItemView[],
  entries: readonly Entry[],
): readonly { item: ItemView; lead: Lead | null }[] => {
  const inHands = entries.flatMap((e) => e.items)
  const listed = new Set(inHands.map((n) => n.item.id))
  const rest = items
    .filter((i) => !listed.has(i.id))
    .sort(
      (a, b) =>
        Number(isAsIntended(a)) - Number(isAsIntended(b)) ||
        (a.verdict.margin_K ?? 1e9) - (b.verdict.margin_K ?? 1e9) ||
        (a.id < b.id ? -1 : 1),
    )
  return [
    ...inHands.map(({ item, lead }) => ({ item, lead })),
    ...rest.map((item) => ({ item, lead: null })),
  ]
}
