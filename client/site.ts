import { computed, signal } from '@preact/signals'
import type {
  CautionRow,
  Changed,
  Intake,
  ItemView,
  ProbeView,
  SiteView,
  Snapshot,
  StorageUnitView,
} from '../config/schema/api.js'
import { handsNeeded } from './hands.js'

/** What is known of the site, as last heard. One value: it changes as a whole, so nothing tears. */
export type Picture = {
  readonly seq: number
  readonly asOf_ms: number
  readonly site: SiteView
  readonly storageUnits: readonly StorageUnitView[]
  readonly items: readonly ItemView[]
  readonly probes: readonly ProbeView[]
  readonly intake: Intake
  /** The wall's clock when the site's clock read `site.now_ms`. */
  readonly wall_ms: number
}

export type Load =
  | { readonly kind: 'loading' }
  | { readonly kind: 'failed'; readonly error: unknown }
  | { readonly kind: 'ready'; readonly picture: Picture }

export type Link =
  | { readonly kind: 'connecting' }
  | { readonly kind: 'live' }
  | { readonly kind: 'lost'; readonly since_ms: number }

export const load = signal<Load>({ kind: 'loading' })
export const link = signal<Link>({ kind: 'connecting' })
export const cautions = signal<ReadonlyMap<string, CautionRow>>(new Map())

/** The wall's clock, moved on once a second by feed.ts so that ages grow on the screen. */
export const wall_ms = signal(Date.now())

export const picture = computed(() => (load.value.kind === 'ready' ? load.value.picture : null))

/** The site's clock at the wall's last tick. While the link is lost it goes on: figures grow old. */
export const now_ms = computed(() => {
  const known = picture.value
  if (known === null) return wall_ms.value
  return known.site.now_ms + Math.max(0, wall_ms.value - known.wall_ms) * known.site.speed
})

export const itemById = computed(
  () => new Map((picture.value?.items ?? []).map((item) => [item.id, item])),
)

export const hands = computed(() => {
  const known = picture.value
  return known === null ? [] : handsNeeded(known.items, known.site.policy)
})

export const probesHeard = computed(() => {
  const probes = picture.value?.probes ?? []
  return { heard: probes.filter((p) => !p.silent).length, all: probes.length }
})

/** Newest figures may lag by this much of the wall's time before the page calls them stale. */
const grace_ms = 5_000
/** And by this many intervals of the quickest probe. */
const staleAfter_intervals = 3

/** Why what is shown cannot be taken for now; null when it can. */
export type Stale = { readonly why: 'link' | 'age'; readonly since_ms: number }

export const stale = computed((): Stale | null => {
  const known = picture.value
  if (known === null || known.asOf_ms === 0) return null
  if (link.value.kind === 'lost') return { why: 'link', since_ms: known.asOf_ms }
  const quickest_s = Math.min(...known.probes.map((p) => p.interval_s))
  if (!Number.isFinite(quickest_s)) return null
  const limit_ms = staleAfter_intervals * quickest_s * 1000 + grace_ms * known.site.speed
  return now_ms.value - known.asOf_ms > limit_ms ? { why: 'age', since_ms: known.asOf_ms } : null
})

export const fromSnapshot = (snapshot: Snapshot, at_ms: number): Picture => ({
  ...snapshot,
  wall_ms: at_ms,
})

/** Newer members take the place of older ones of the same id; order is kept, new ones come last. */
const replaced = <T extends { readonly id: string }>(
  old: readonly T[],
  newer: readonly T[],
): readonly T[] => {
  if (newer.length === 0) return old
  const byId = new Map(newer.map((x) => [x.id, x]))
  const kept = old.map((x) => {
    const next = byId.get(x.id)
    if (next !== undefined) byId.delete(x.id)
    return next ?? x
  })
  return byId.size === 0 ? kept : [...kept, ...byId.values()]
}

/**
 * The picture after one batch of the feed.
 *
 * @returns null when the batch does not follow on what is known: then everything is fetched again
 */
export const merged = (known: Picture, batch: Changed, at_ms: number): Picture | null => {
  if (batch.seq <= known.seq) return known // already in the snapshot
  if (batch.seq !== known.seq + 1) return null
  return {
    seq: batch.seq,
    asOf_ms: batch.asOf_ms,
    site: { ...known.site, now_ms: batch.now_ms, speed: batch.speed },
    storageUnits: replaced(known.storageUnits, batch.storageUnits),
    items: replaced(known.items, batch.items),
    probes: replaced(known.probes, batch.probes),
    intake: batch.intake,
    wall_ms: at_ms,
  }
}
