import type { ItemView, Snapshot, StorageUnitView } from '../../config/schema/api.js'
import { isAsIntended, isFalling, type MarkKind, markOf, needsRoom } from '../shown.js'

/** One item's lane. Its place among the others never changes; only its width does. */
export type Lane = {
  readonly kind: 'lane'
  readonly item: ItemView
  readonly mark: MarkKind
  readonly x: number
  readonly w: number
}

/** Calm neighbours folded into one strip, with how far above their lines they are. */
export type Fold = {
  readonly kind: 'fold'
  readonly key: string
  readonly items: readonly ItemView[]
  readonly marks: readonly MarkKind[]
  readonly x: number
  readonly w: number
}

export type Bay = {
  readonly unit: StorageUnitView
  readonly x: number
  readonly w: number
  readonly parts: readonly (Lane | Fold)[]
}

export type Layout = { readonly bays: readonly Bay[]; readonly width: number }

export type LaneRules = {
  /** Room there is, px. */
  readonly width: number
  /** Least width of a calm lane, px; the others in proportion. */
  readonly least: number
  readonly gap: number
  /** Least width of a bay, px: its head must be readable. */
  readonly leastBay: number
  /** Calm lanes are folded rather than narrower than this, px. */
  readonly comfortable: number
  /** Every lane this wide, as on a phone; null where the room decides. */
  readonly fixed: number | null
  /** More lanes than these and calm ones fold. */
  readonly foldBeyond: number
  /** Folds that somebody opened. */
  readonly opened: ReadonlySet<string>
}

/** Widths of a lane that needs room, in those of a calm one: the first that fits is taken. */
const roomy = [2.7, 2.5, 2.3, 2.15, 2] as const

const weightOf = (mark: MarkKind, roomyWeight: number): number =>
  needsRoom(mark) ? roomyWeight : mark === 'silent' ? 1.35 : 1

/** A strip of folded lanes stands as wide as this many calm ones. */
const foldWeight = 2.2
/** Fewer calm neighbours than these are left as they are: a strip would save no room. */
const foldFrom = 3

type Policy = Snapshot['site']['policy']
type LanePart = { readonly kind: 'lane'; readonly item: ItemView; readonly mark: MarkKind }

/** What nobody needs to see one by one. What falls towards its line stays in sight. */
const isCalm = (lane: LanePart, policy: Policy): boolean =>
  !needsRoom(lane.mark) &&
  lane.mark !== 'silent' &&
  (isAsIntended(lane.item) || !isFalling(lane.item, policy))

type Part =
  | LanePart
  | {
      readonly kind: 'fold'
      readonly key: string
      readonly items: readonly ItemView[]
      readonly marks: readonly MarkKind[]
    }

const foldKey = (items: readonly ItemView[]): string => `${items[0]?.id}…${items.at(-1)?.id}`

/** Runs of calm neighbours become strips, unless somebody opened them. */
const folded = (
  lanes: readonly LanePart[],
  opened: ReadonlySet<string>,
  policy: Policy,
): Part[] => {
  const parts: Part[] = []
  let run: LanePart[] = []
  const flush = (): void => {
    const items = run.map((l) => l.item)
    if (run.length >= foldFrom && !items.some((i) => opened.has(i.id)))
      parts.push({ kind: 'fold', key: foldKey(items), items, marks: run.map((l) => l.mark) })
    else parts.push(...run)
    run = []
  }
  for (const lane of lanes) {
    if (isCalm(lane, policy)) run.push(lane)
    else {
      flush()
      parts.push(lane)
    }
  }
  flush()
  return parts
}

const weights = (parts: readonly Part[], roomyWeight: number = roomy[0]): number =>
  parts.reduce(
    (sum, p) => sum + (p.kind === 'fold' ? foldWeight : weightOf(p.mark, roomyWeight)),
    0,
  )

type OpenBay = { readonly unit: StorageUnitView; readonly parts: readonly Part[] }

/**
 * Opens strips again as long as there is comfortable room: first where somebody may have to act,
 * since there the neighbours matter, then the short ones.
 *
 * @param room  in widths of a calm lane
 */
const unfolded = (bays: readonly OpenBay[], room: number, policy: Policy): readonly OpenBay[] => {
  const isPressing = (bay: OpenBay) =>
    bay.parts.some((p) => p.kind === 'lane' && !isCalm(p, policy))
  const strips = bays
    .flatMap((bay) =>
      bay.parts.flatMap((part) =>
        part.kind === 'fold' ? [{ part, pressing: isPressing(bay) }] : [],
      ),
    )
    .sort(
      (a, b) =>
        Number(b.pressing) - Number(a.pressing) || a.part.items.length - b.part.items.length,
    )
  let free = room - bays.reduce((sum, bay) => sum + weights(bay.parts), 0)
  const open = new Set<string>()
  for (const { part } of strips) {
    const more = part.items.length - foldWeight
    if (more > free) continue
    free -= more
    open.add(part.key)
  }
  return bays.map(({ unit, parts }) => ({
    unit,
    parts: parts.flatMap((part): Part[] =>
      part.kind === 'fold' && open.has(part.key)
        ? part.items.flatMap((item, i): Part[] => {
            const mark = part.marks[i]
            return mark === undefined ? [] : [{ kind: 'lane', item, mark }]
          })
        : [part],
    ),
  }))
}

/** Width of a calm lane, once the bays too narrow for their heads have taken their least. */
const unitWidth = (
  bays: readonly { readonly parts: readonly Part[] }[],
  room: number,
  rules: LaneRules,
  roomyWeight: number,
): number => {
  let one = 0
  let narrow = new Set<number>()
  // Each round can only make more bays narrow, so it ends after as many rounds as there are bays.
  for (let round = 0; round <= bays.length; round += 1) {
    const free = room - narrow.size * rules.leastBay
    const total = bays.reduce(
      (sum, b, i) => sum + (narrow.has(i) ? 0 : weights(b.parts, roomyWeight)),
      0,
    )
    one = total === 0 ? rules.least : Math.max(rules.least, free / total)
    const next = new Set(
      bays.flatMap((b, i) => (weights(b.parts, roomyWeight) * one < rules.leastBay ? [i] : [])),
    )
    if (next.size <= narrow.size) break
    narrow = next
  }
  return one
}

/**
 * Where every lane stands. Storage units come in the site's order and items in shelf order; a lane
 * is 1 wide when calm, 2.7 when somebody may have to act, 1.35 when silent. Where the room does not
 * suffice, calm neighbours fold into strips; where even that does not, the chart is wider than its
 * window and scrolls.
 */
export const layoutLanes = (
  units: readonly StorageUnitView[],
  items: readonly ItemView[],
  policy: Policy,
  rules: LaneRules,
): Layout => {
  const byUnit = new Map<string, LanePart[]>()
  for (const item of items) {
    const lane = { kind: 'lane', item, mark: markOf(item, policy) } as const
    const known = byUnit.get(item.storageUnit)
    if (known === undefined) byUnit.set(item.storageUnit, [lane])
    else known.push(lane)
  }
  const all = units
    .map((unit) => ({ unit, lanes: byUnit.get(unit.id) ?? [] }))
    .filter((bay) => bay.lanes.length > 0)
  const room = rules.width - rules.gap * Math.max(0, all.length - 1)
  const open = all.map((bay) => ({ unit: bay.unit, parts: bay.lanes as Part[] }))
  const openWeight = open.reduce((sum, b) => sum + weights(b.parts), 0)
  const crowded = items.length > rules.foldBeyond || openWeight * rules.comfortable > room
  const bays =
    rules.fixed === null && crowded
      ? unfolded(
          all.map((bay) => ({ unit: bay.unit, parts: folded(bay.lanes, rules.opened, policy) })),
          room / rules.comfortable,
          policy,
        )
      : open
  // Where much is at risk, each gets a little less room before the chart grows wider than its window.
  const fits = (roomyWeight: number): boolean =>
    bays.reduce(
      (sum, b) => sum + Math.max(rules.leastBay, weights(b.parts, roomyWeight) * rules.least),
      0,
    ) <= room
  const roomyWeight = roomy.find(fits) ?? roomy[roomy.length - 1] ?? 2
  const one = rules.fixed ?? unitWidth(bays, room, rules, roomyWeight)
  const widthOf = (part: Part, stretch: number): number =>
    rules.fixed ??
    one * stretch * (part.kind === 'fold' ? foldWeight : weightOf(part.mark, roomyWeight))

  let x = 0
  const placed = bays.map((bay, i): Bay => {
    if (i > 0) x += rules.gap
    const from = x
    // A bay is never narrower than its head: its lanes share what is lacking.
    const stretch = Math.max(1, rules.leastBay / (weights(bay.parts, roomyWeight) * one))
    const parts = bay.parts.map((part): Lane | Fold => {
      const here = { ...part, x, w: widthOf(part, stretch) }
      x += here.w
      return here
    })
    return { unit: bay.unit, x: from, w: x - from, parts }
  })
  return { bays: placed, width: x }
}

/** Every lane, left to right, as the arrow keys walk them. */
export const lanesOf = (layout: Layout): readonly (Lane | Fold)[] =>
  layout.bays.flatMap((bay) => bay.parts)
